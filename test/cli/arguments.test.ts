import { describe, expect, it } from "vitest";
import { OPTIONS, type OptionName, readArguments } from "../../src/cli/arguments.js";

const all = Object.keys(OPTIONS) as OptionName[];
const read = (...args: string[]): ReturnType<typeof readArguments> => readArguments("find", args, all);

describe("arguments", () => {
  it("have defaults", () => {
    expect(read("p.json")).toEqual({
      files: ["p.json"],
      help: false,
      format: "text",
      out: undefined,
      certificate: undefined,
      force: false,
      columns: undefined,
      basis: undefined,
      find: {},
    });
  });

  it("choose levels", () => {
    const levels = (text: string): unknown => read(`--levels=${text}`).find.levels;
    expect(levels("all")).toBe("all");
    expect(levels("lowest:3")).toEqual({ lowest: 3 });
    expect(levels("nearest:-1.5e3")).toEqual({ nearest: -1500 });
    expect(levels("nearest:2:4")).toEqual({ nearest: 2, count: 4 });
    expect(levels("-1..2.5")).toEqual({ from: -1, to: 2.5 });
    expect(levels("0...5")).toEqual({ from: 0, to: 0.5 });
    for (const bad of ["3", "lowest", "lowest:x", "lowest:0", "nearest:", "1..", "1..2..3", "1...5", "nearest:1e999"]) {
      expect(() => levels(bad), bad).toThrow(/--levels .*: give all, lowest:3/);
    }
  });

  it("take short and long names of depths", () => {
    expect(read("--depth", "second").find.depth).toBe("second order");
    expect(read("--depth", "second order").find.depth).toBe("second order");
    expect(read("--depth", "labels").find.depth).toBe("labels");
  });

  it("split columns", () => {
    expect(read("--columns", "level, E0,label:J z").columns).toEqual(["level", "E0", "label:J z"]);
  });
});
