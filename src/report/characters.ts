/** Width of a text in columns of a terminal: its code points, combining marks aside. */
export function textWidth(text: string): number {
  let width = 0;
  for (const character of text) if (!/\p{Mn}|\p{Me}|\p{Cf}|\uFE0F/u.test(character)) width++;
  return width;
}

/** Control characters (line feeds and tabs in the names of kets, say) made visible, so that a cell stays on its line. */
export function visible(text: string): string {
  return text.replace(/\p{Cc}/gu, (c) => {
    const code = c.codePointAt(0) ?? 0;
    return code < 32 ? String.fromCodePoint(0x2400 + code) : code === 127 ? "␡" : "�";
  });
}

/** Fills up with blanks on the right. */
export function padRight(text: string, width: number): string {
  return text + " ".repeat(Math.max(0, width - textWidth(text)));
}

/** Fills up with blanks on the left. */
export function padLeft(text: string, width: number): string {
  return " ".repeat(Math.max(0, width - textWidth(text))) + text;
}

/** Breaks prose at blanks into lines of at most `width`; later lines are indented. No-break spaces hold, and end as blanks. */
export function wrapProse(text: string, width: number, indent = ""): string[] {
  return wrapChunks(text.split(" "), " ", width, indent).map((line) => line.replaceAll("\u00a0", " "));
}

/** Puts chunks on lines of at most `width`; a chunk that is too long by itself gets a line of its own. */
export function wrapChunks(chunks: readonly string[], separator: string, width: number, indent = ""): string[] {
  const lines: string[] = [];
  let line: string | undefined;
  for (const chunk of chunks) {
    if (line === undefined) line = lines.length === 0 ? chunk : indent + chunk;
    else if (textWidth(line) + textWidth(separator) + textWidth(chunk) <= width) line += separator + chunk;
    else {
      lines.push(line);
      line = indent + chunk;
    }
  }
  return line === undefined ? lines : [...lines, line];
}
