/** What the person chose: follow the system, or always day, or always night. */
export type ThemeChoice = 'system' | 'day' | 'night';

const KEY = 'quayword.theme';

function isChoice(value: string | null): value is ThemeChoice {
  return value === 'system' || value === 'day' || value === 'night';
}

/** The stored choice; `system` where nothing is stored or storage is refused by the browser. */
export function themeChoice(): ThemeChoice {
  try {
    const stored = localStorage.getItem(KEY);
    return isChoice(stored) ? stored : 'system';
  } catch {
    return 'system';
  }
}

/** Sets `data-theme` on the document and remembers the choice on this device. */
export function chooseTheme(choice: ThemeChoice): void {
  document.documentElement.dataset.theme = choice;
  try {
    localStorage.setItem(KEY, choice);
  } catch {
    // A browser that refuses storage still shows the theme until the page is closed.
  }
}

/** Called before the first render, so that no page is painted in the wrong theme. */
export function applyStoredTheme(): void {
  document.documentElement.dataset.theme = themeChoice();
}
