import { GoodBasisError } from "../errors.js";

/** One piece of the text of an exact number. */
export interface Token {
  /** `number`: digits, decimals and exponent; `word`: a name or a LaTeX command; `sign`: one character; `end`: no more. */
  readonly kind: "number" | "word" | "sign" | "end";
  /** The piece, in the plain alphabet: "−" is "-", "·" and "×" and "\cdot" are "*", "√" is "sqrt". */
  readonly text: string;
  /** Where it begins, counted from 0 in UTF-16 units. */
  readonly position: number;
}

const SPACE = /(?:\s|\\[,;:! ]|\\left(?![a-z])|\\right(?![a-z])|\\q?quad(?![a-z]))+/y;
const NUMBER = /(?:\d+(?:\.\d+)?|\.\d+)(?:[eE][+-]?\d+(?![\d.]))?/y;
const WORD = /(?:\\[a-zA-Z]+|[a-zA-Z]+)/y;
const SIGNS: Readonly<Record<string, string>> = {
  "+": "+",
  "-": "-",
  "−": "-",
  "*": "*",
  "·": "*",
  "⋅": "*",
  "×": "*",
  "/": "/",
  "^": "^",
  "(": "(",
  ")": ")",
  "{": "{",
  "}": "}",
};
const WORDS: Readonly<Record<string, string>> = {
  i: "i",
  sqrt: "sqrt",
  "\\sqrt": "sqrt",
  "\\frac": "frac",
  "\\dfrac": "frac",
  "\\tfrac": "frac",
};
const PRODUCTS: readonly string[] = ["\\cdot", "\\times"];

/**
 * Cuts the text of an exact number into pieces.
 *
 * @throws GoodBasisError `text` - a piece that no exact number holds, with its position
 */
export function tokensOf(text: string): Token[] {
  const tokens: Token[] = [];
  let position = 0;
  const take = (pattern: RegExp): string | undefined => {
    pattern.lastIndex = position;
    return pattern.exec(text)?.[0];
  };
  while (position < text.length) {
    const space = take(SPACE);
    if (space !== undefined) {
      position += space.length;
      continue;
    }
    const token = oneToken(text, position, take);
    tokens.push(token.token);
    position += token.length;
  }
  tokens.push({ kind: "end", text: "", position: text.length });
  return tokens;
}

function oneToken(
  text: string,
  position: number,
  take: (pattern: RegExp) => string | undefined,
): { token: Token; length: number } {
  const number = take(NUMBER);
  if (number !== undefined) return { token: { kind: "number", text: number, position }, length: number.length };
  const word = take(WORD);
  if (word !== undefined) {
    if (PRODUCTS.includes(word)) return { token: { kind: "sign", text: "*", position }, length: word.length };
    const known = Object.hasOwn(WORDS, word) ? WORDS[word] : undefined;
    if (known === undefined) throw badText(text, position, `"${word}" is not known`);
    return { token: { kind: "word", text: known, position }, length: word.length };
  }
  const sign = text.charAt(position);
  if (sign === "√") return { token: { kind: "word", text: "sqrt", position }, length: 1 };
  const known = Object.hasOwn(SIGNS, sign) ? SIGNS[sign] : undefined;
  if (known === undefined) throw badText(text, position, `"${sign}" has no place in an exact number`);
  return { token: { kind: "sign", text: known, position }, length: 1 };
}

/** The error of a text that is no exact number: what is wrong, and where. */
export function badText(text: string, position: number, what: string): GoodBasisError {
  const shown = text.length > 60 ? `${text.slice(0, 60)}…` : text;
  return new GoodBasisError(
    "text",
    `the exact number "${shown}": ${what}, at character ${position + 1}; ` +
      'write fractions, decimals, i, sqrt(…), + - * / ^ and parentheses, such as "-1/2*sqrt(3)" or "(1+2i)/sqrt(5)"',
    { text, position },
  );
}
