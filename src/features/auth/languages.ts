import type { Language } from '../../../shared/api/common.ts';

const NAMES: Record<Language, string> = {
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

/** Languages a person can be written to in, each by its own name. */
export const LANGUAGES = Object.entries(NAMES).map(([value, label]) => ({ value, label }));
