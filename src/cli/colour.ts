const CODES = { good: 32, bad: 31, open: 33 } as const;

/** Marks the first word of a text as good (green), bad (red) or open (yellow), on a screen with colours. */
export function markFirstWord(text: string, mood: keyof typeof CODES, colours: boolean): string {
  return colours ? text.replace(/^[^\s:]+/, (word) => `\u001b[1;${CODES[mood]}m${word}\u001b[0m`) : text;
}
