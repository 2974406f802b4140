import { spawnSync } from "node:child_process";
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { builtPackage } from "../build.js";
import { GOOD } from "./fake-terminal.js";

const laboratory = fileURLToPath(new URL("../../docs/examples/laboratory.json", import.meta.url));
let folder = "";

function program(args: readonly string[], input?: string): { status: number | null; stdout: string; stderr: string } {
  return spawnSync(process.execPath, [join(builtPackage, "cli/main.js"), ...args], {
    encoding: "utf8",
    cwd: folder,
    input,
  });
}

describe("the program as a process", () => {
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), "goodbasis-"));
  });
  afterEach(() => {
    rmSync(folder, { recursive: true });
  });

  it("runs the laboratory example, quiet on standard error and without colours in a pipe", () => {
    const { status, stdout, stderr } = program(["find", laboratory]);
    expect({ status, stderr }).toEqual({ status: 0, stderr: "" });
    expect(stdout).toContain("GOOD: V couples no two states inside any level studied");
    expect(stdout).not.toContain("\u001b");
    // every sign of it is one column wide
    expect(Math.max(...stdout.split("\n").map((line) => [...line].length))).toBeLessThanOrEqual(120);
  });

  it("gives the same bits twice", () => {
    const json = (): string =>
      program(["find", laboratory, "--format", "json", "--certificate", "c.json", "--force"]).stdout;
    const first = json();
    const certificate = readFileSync(join(folder, "c.json"), "utf8");
    expect(json()).toBe(first);
    expect(readFileSync(join(folder, "c.json"), "utf8")).toBe(certificate);
  });

  it("writes files whole and leaves no other behind", () => {
    writeFileSync(join(folder, "p.json"), GOOD);
    expect(program(["find", "p.json", "--out", "r.txt", "--certificate", "c.json"])).toMatchObject({
      status: 0,
      stdout: "",
    });
    expect(readdirSync(folder).sort()).toEqual(["c.json", "p.json", "r.txt"]);
    const before = readFileSync(join(folder, "r.txt"), "utf8");
    const again = program(["find", "p.json", "--out", "r.txt"]);
    expect(again.status).toBe(2);
    expect(again.stderr).toContain("error [output]");
    expect(program(["recheck", "c.json", "p.json"]).status).toBe(0);
    // One path cannot be written: neither file appears.
    const half = program(["find", "p.json", "--out", "new.txt", "--certificate", "no/such/folder.json"]);
    expect(half).toMatchObject({ status: 2, stdout: "" });
    expect(half.stderr).toMatch(
      /^error \[output\]: goodbasis find: new\.txt, no\/such\/folder\.json cannot be written \(ENOENT/,
    );
    expect(readdirSync(folder).sort()).toEqual(["c.json", "p.json", "r.txt"]);
    const lost = program(["find", "p.json", "--out", "no/such/r.txt"]);
    expect(lost.stderr).toMatch(/no\/such\/r\.txt cannot be written \(ENOENT: no such file or directory\); check/);
    const onto = program(["find", "p.json", "--out", "new.txt", "--certificate", ".", "--force"]);
    expect(onto).toMatchObject({ status: 2, stdout: "", stderr: expect.stringContaining("is a folder") });
    expect(readdirSync(folder).sort()).toEqual(["c.json", "p.json", "r.txt"]);
    expect(readFileSync(join(folder, "r.txt"), "utf8")).toBe(before);
  });

  it("reads standard input and says 2 to what is no problem", () => {
    expect(program(["find", "-"], GOOD).status).toBe(0);
    const { status, stdout, stderr } = program(["find", "-"], "{ }");
    expect({ status, stdout }).toEqual({ status: 2, stdout: "" });
    expect(stderr).toMatch(/^error \[file\]: goodbasis find: standard input, line 1, format: expected/);
    expect(stderr).not.toContain("    at ");
  });

  it("is on good terms with a reader that stops early", () => {
    // More than a pipe holds, so that the program still writes when the reader has gone.
    const energies = Array.from({ length: 1000 }, (_, k) => k);
    const large = {
      format: "goodbasis-problem",
      formatVersion: 1,
      n: 1000,
      h0: { diagonal: energies },
      v: { triplets: [] },
    };
    writeFileSync(join(folder, "l.json"), JSON.stringify(large));
    const command = `"${process.execPath}" "${join(builtPackage, "cli/main.js")}" table l.json --format json | head -n 1`;
    const { stdout, stderr } = spawnSync("sh", ["-c", command], { encoding: "utf8", cwd: folder });
    expect({ stdout, stderr }).toEqual({ stdout: "{\n", stderr: "" });
  });
});
