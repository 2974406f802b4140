import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { jsonFault, lineAndColumn, offsetOf } from "../../src/problem/json-text.js";

function faultOf(text: string): string {
  const fault = jsonFault(text);
  if (fault === undefined) return "none";
  const { line, column } = lineAndColumn(text, fault.offset);
  return `${line}:${column} expected ${fault.expected}, got ${fault.came}`;
}

describe("jsonFault", () => {
  it("says where and what", () => {
    expect(faultOf('{\n  "a": 1,\n}')).toBe('3:1 expected a key in double quotes (no comma before "}"), got "}"');
    expect(faultOf('{ "a": [1, 2 3] }')).toBe('1:14 expected "," or "]", got "3"');
    expect(faultOf('{ "a" 1 }')).toBe('1:7 expected ":" after the key "a", got "1"');
    expect(faultOf('{ "a": NaN }')).toBe('1:8 expected a JSON value, got "NaN"');
    expect(faultOf('{ "a": 01 }')).toBe('1:9 expected "," or "}", got "1"');
    expect(faultOf('{ "a": 1')).toBe('1:9 expected "," or "}", got the end of the file');
    expect(faultOf("")).toBe("1:1 expected a JSON value, got the end of the file");
    expect(faultOf("{} {}")).toBe('1:4 expected the end of the file, got "{"');
    expect(faultOf('"a\nb"')).toBe('1:1 expected a JSON value, got ""a"');
  });

  it("refuses a key that occurs twice, which would lose one value", () => {
    expect(faultOf('{ "Jz": 1,\r\n  "L2": { "Jz": 2 },\r\n  "Jz": 3 }')).toBe(
      '3:3 expected every key once, got "Jz" again',
    );
    expect(faultOf('{ "a": 1, "\\u0061": 2 }')).toBe('1:11 expected every key once, got "a" again');
  });

  it("refuses nesting beyond all sense instead of overflowing the stack", () => {
    expect(faultOf("[".repeat(100_000))).toContain("levels of nesting");
  });

  it("takes long strings", () => {
    expect(faultOf(JSON.stringify("x\n".repeat(1_000_000)))).toBe("none");
  });

  it("agrees with JSON.parse on any JSON", () => {
    fc.assert(
      fc.property(fc.json(), (text) => jsonFault(text) === undefined),
      { seed: 11 },
    );
  });

  it("agrees with JSON.parse on damaged JSON", () => {
    const damaged = fc.tuple(fc.json(), fc.nat(), fc.constantFrom(",", "]", "}", '"', "1", "x", "\\", "\n"));
    fc.assert(
      fc.property(damaged, ([json, at, sign]) => {
        const place = at % (json.length + 1);
        const text = json.slice(0, place) + sign + json.slice(place);
        let good = true;
        try {
          JSON.parse(text);
        } catch {
          good = false;
        }
        const fault = jsonFault(text);
        // A key twice is the one thing that JSON.parse takes and this does not.
        return good ? fault === undefined || fault.expected === "every key once" : fault !== undefined;
      }),
      { seed: 12, numRuns: 2000 },
    );
  });
});

describe("offsetOf", () => {
  const text = '{ "a": [10, { "b c": true }],\n "d": null }';

  it("finds a value", () => {
    expect(text.slice(offsetOf(text, ["a", 1, "b c"]))).toMatch(/^true/);
    expect(text.slice(offsetOf(text, ["a", 0]))).toMatch(/^10/);
    expect(text.slice(offsetOf(text, ["d"]))).toMatch(/^null/);
    expect(offsetOf(text, [])).toBe(0);
  });

  it("finds the innermost container of a value that is not there", () => {
    expect(text.slice(offsetOf(text, ["a", 1, "x"]))).toMatch(/^\{ "b c"/);
    expect(text.slice(offsetOf(text, ["a", 7]))).toMatch(/^\[10/);
  });
});
