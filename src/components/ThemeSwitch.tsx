import { useState } from 'react';
import { chooseTheme, type ThemeChoice, themeChoice } from '../lib/theme.ts';
import { Segmented } from './Segmented.tsx';

const CHOICES = [
  { value: 'system', label: 'System' },
  { value: 'day', label: 'Day' },
  { value: 'night', label: 'Night' },
] as const;

/** Day, night, or as the device is set. Remembered on this device. */
export function ThemeSwitch() {
  const [choice, setChoice] = useState<ThemeChoice>(themeChoice);
  return (
    <Segmented<ThemeChoice>
      label="Colours"
      value={choice}
      options={CHOICES}
      onChange={(value) => {
        chooseTheme(value);
        setChoice(value);
      }}
    />
  );
}
