/** A number to four digits, as it stands in a sentence. */
export function short(x: number): string {
  return String(Number(x.toPrecision(4))).replace("-", "−");
}
