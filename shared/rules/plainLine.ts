/** Whether a text stands on one line and prints as it is: no C0 control character and no DEL (ISO/IEC 6429). */
export const isPlainLine = (text: string): boolean =>
  // biome-ignore lint/suspicious/noControlCharactersInRegex: the rule is about control characters
  !/[\u0000-\u001f\u007f]/.test(text);
