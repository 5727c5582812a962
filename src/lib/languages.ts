import type { Language } from '../../shared/api/common.ts';

/** A language's name in English, for staff. */
export const LANGUAGE_NAMES: Readonly<Record<Language, string>> = {
  en: 'English',
  fr: 'French',
  it: 'Italian',
  es: 'Spanish',
  de: 'German',
  pt: 'Portuguese',
  nl: 'Dutch',
  el: 'Greek',
  ru: 'Russian',
  tr: 'Turkish',
  ar: 'Arabic',
  zh: 'Chinese',
  ja: 'Japanese',
};

/** A language's own name, for whoever reads it. */
const OWN_NAMES: Readonly<Record<Language, string>> = {
  en: 'English',
  fr: 'Français',
  it: 'Italiano',
  es: 'Español',
  de: 'Deutsch',
  pt: 'Português',
  nl: 'Nederlands',
  el: 'Ελληνικά',
  ru: 'Русский',
  tr: 'Türkçe',
  ar: 'العربية',
  zh: '中文',
  ja: '日本語',
};

const choices = (names: Readonly<Record<Language, string>>) =>
  Object.entries(names).map(([value, label]) => ({ value, label }));

/** Choices for staff who say what somebody else speaks. */
export const LANGUAGE_CHOICES = choices(LANGUAGE_NAMES);

/** Choices for people who say what they speak themselves. */
export const OWN_LANGUAGE_CHOICES = choices(OWN_NAMES);
