import type { LabelDeclaration } from "../audit/label-family.js";
import { Surd } from "../exact/surd.js";
import type { BlockValue } from "./proof.js";
import { valueText } from "./value-text.js";

/** Every root of unity in the field has this power 1. */
const FIELD_ORDER = 24;

/** Room for the rounding of an angle. */
const ROUNDING = 2 ** -40;

/**
 * Whether a text names an eigenvalue: a number by itself, j for j(j + 1), a root of unity by its turn.
 *
 * @param order - N with A^N = 1, checked before
 */
export function labelFits(
  text: string,
  value: BlockValue,
  family: LabelDeclaration | undefined,
  order: number | undefined,
): boolean {
  if (value.kind === "unknown") return text === valueText(value);
  if (value.kind === "roots") return text === valueText(value) || (order !== undefined && turnsFit(text, value, order));
  if (typeof family === "object" && "root" in family && turnOf(text) !== undefined) {
    const isRoot = order !== undefined ? family.root % order === 0 : value.value.power(FIELD_ORDER).equals(1);
    return isRoot && isAt(turnOf(text) ?? 0, value.value.toComplex());
  }
  const bare = text.startsWith("eigenvalue ") ? text.slice("eigenvalue ".length) : text;
  const number = numberOf(bare);
  if (number === undefined) return false;
  const isJ = family === "j" && bare === text;
  return value.value.equals(isJ ? number.times(number.plus(1)) : number);
}

function numberOf(text: string): Surd | undefined {
  try {
    return Surd.from(text.startsWith("+") ? text.slice(1) : text);
  } catch {
    return undefined;
  }
}

/** k/N of "exp(2πi·k/N)" and of ±1, ±i. */
function turnOf(text: string): number | undefined {
  const quarter = ["+1", "+i", "−1", "−i"].indexOf(text);
  if (quarter >= 0) return quarter / 4;
  const found = /^exp\(2πi·(\d+)\/(\d+)\)$/.exec(text);
  return found === null ? undefined : Number(found[1]) / Number(found[2]);
}

function isAt(turn: number, { re, im }: { readonly re: number; readonly im: number }): boolean {
  const angle = 2 * Math.PI * turn;
  return Math.hypot(Math.cos(angle) - re, Math.sin(angle) - im) <= ROUNDING;
}

/** Whether the turns are all that the roots allow, each once. */
function turnsFit(text: string, value: BlockValue, order: number): boolean {
  if (value.kind !== "roots" || value.part === "whole") return false;
  const turns = text.split(" | ").map(turnOf);
  if (new Set(turns).size !== turns.length) return false;
  const middles = value.roots.intervals.map(({ low, high }) => low.plus(high).over(2).toNumber());
  const allowed = (turn: number): boolean => {
    const [x, y] = [Math.cos(2 * Math.PI * turn), Math.sin(2 * Math.PI * turn)];
    if (value.part === "re") return middles.some((t) => Math.abs(t - x) <= ROUNDING);
    const re = value.re?.toNumber() ?? 0;
    return Math.abs(re - x) <= ROUNDING && middles.some((t) => Math.abs(t - y) <= ROUNDING);
  };
  const all = Array.from({ length: order }, (_, k) => k / order).filter(allowed);
  return (
    turns.length === all.length &&
    turns.every((turn) => turn !== undefined && all.some((other) => Math.abs(other - turn) <= ROUNDING))
  );
}
