import { describe, expect, it } from "vitest";
import { VERSION } from "../../src/version.js";
import { GOOD, NOT_GOOD, runFake } from "./fake-terminal.js";

const files = { "p.json": GOOD, "n.json": NOT_GOOD };

describe("the program", () => {
  it("helps", () => {
    const { status, out, err } = runFake(["--help"]);
    expect({ status, err }).toEqual({ status: 0, err: "" });
    for (const verb of ["find", "table", "audit", "validate", "recheck"]) expect(out).toContain(`goodbasis ${verb} `);
    expect(runFake([]).status).toBe(2);
    expect(runFake([]).err).toBe(out);
    expect(runFake([]).out).toBe("");
  });

  it("helps with every verb, with its options and examples", () => {
    for (const verb of ["find", "table", "audit", "validate", "recheck"]) {
      const { status, out } = runFake([verb, "--help"]);
      expect(status).toBe(0);
      expect(out).toMatch(new RegExp(`^Usage: goodbasis ${verb} `));
      expect(out).toContain("--format");
      expect(out).toMatch(new RegExp(`Examples:\n {2}goodbasis ${verb} `));
      expect(out).toContain("Exit status");
    }
  });

  it("says its version", () => {
    expect(runFake(["--version"])).toMatchObject({ status: 0, out: `${VERSION}\n` });
  });

  it("refuses what it does not know, in one line without a stack", () => {
    const bad = (...args: string[]): string => {
      const { status, out, err } = runFake(args, { files });
      expect(status).toBe(2);
      expect(out).toBe("");
      expect(err.trimEnd().split("\n")).toHaveLength(1);
      return err;
    };
    expect(bad("fnd", "p.json")).toBe(
      'error [option]: goodbasis fnd: there is no verb "fnd"; give find, table, audit, validate, recheck, or --help\n',
    );
    expect(bad("find")).toMatch(
      /^error \[option\]: goodbasis find: expected find FILE, got 0 files; see goodbasis find --help/,
    );
    expect(bad("find", "p.json", "n.json")).toMatch(/got 2 files/);
    expect(bad("find", "p.json", "--frmat", "csv")).toMatch(/^error \[option\]: .*--frmat.*see goodbasis find --help/);
    expect(bad("audit", "p.json", "--levels", "all")).toMatch(/--levels is no option of goodbasis audit/);
    expect(bad("find", "p.json", "--format", "xml")).toMatch(
      /--format xml: there is no such format; give text, markdown/,
    );
    expect(bad("find", "p.json", "--depth", "deep")).toMatch(/--depth deep: give labels, first, second, full/);
    expect(bad("find", "p.json", "--lambda", "x")).toMatch(/--lambda x: give a number/);
    expect(bad("find", "p.json", "--levels", "some")).toMatch(/--levels some: give all, lowest:3/);
    expect(bad("find", "p.json", "--resolution", "2")).toMatch(/^error \[option\]: .*resolution is 2/);
    expect(bad("find", "p.json", "--levels", "7..8")).toMatch(/^error \[no-level\]: /);
    expect(bad("find", "p.json", "--columns", "level,label:C")).toMatch(
      /there is no column "label:C"; give some of .*label:A, label:B/,
    );
    expect(bad("find", "gone.json")).toMatch(
      /^error \[file\]: goodbasis find: gone.json cannot be read \(ENOENT: no such file or directory\); check the path/,
    );
  });

  it("names the file of a problem that cannot be used", () => {
    const broken = JSON.stringify({
      format: "goodbasis-problem",
      formatVersion: 1,
      h0: [
        [0, 1],
        [2, 0],
      ],
      v: { diagonal: [0, 0] },
    });
    expect(runFake(["find", "b.json"], { files: { "b.json": broken } })).toMatchObject({
      status: 2,
      out: "",
      err: expect.stringMatching(
        /^error \[not-hermitian\]: goodbasis find: b\.json, line 1, h0: H0 is not Hermitian: .*row 0, column 1.*correct the matrix/,
      ),
    });
    expect(runFake(["find", "b.json"], { files: { "b.json": "{\n  1 }" } }).err).toBe(
      'error [file]: goodbasis find: b.json, line 2, column 3: expected a key in double quotes (no comma before "}"), got "1"; correct the JSON there\n',
    );
  });

  it("reads standard input, and matrix files beside the problem", () => {
    expect(runFake(["find", "-"], { files: { "-": GOOD } }).status).toBe(0);
    const withFile = GOOD.replace(/"v": \[[^c]*?\],\n {2}"c/, '"v": { "matrixMarket": "v.mtx" },\n  "c');
    expect(withFile).toContain("v.mtx");
    const mtx = "%%MatrixMarket matrix coordinate real symmetric\n3 3 1\n2 1 0.5\n";
    const read = runFake(["find", "dir/p.json"], { files: { "dir/p.json": withFile, "dir/v.mtx": mtx } });
    expect(read.status).toBe(0);
    expect(read.out).toBe(runFake(["find", "p.json"], { files }).out);
    expect(runFake(["find", "dir/p.json"], { files: { "dir/p.json": withFile } }).err).toMatch(
      /^error \[file\]: goodbasis find: dir\/p\.json, line \d+, v\.matrixMarket: dir\/v\.mtx cannot be read/,
    );
  });
});

describe("goodbasis find", () => {
  it("prints title, verdict and states", () => {
    const { status, out, err } = runFake(["find", "p.json"], { files });
    expect({ status, err }).toEqual({ status: 0, err: "" });
    expect(out).toMatch(/^A pair\nAll numbers of this problem are invented\.\n\nGOOD: /);
    expect(out).toContain("B does not commute with V");
    expect(out).toMatch(/\nStates\nlevel +E0 /);
    expect(out).toContain("0.707107 (|a⟩ + |b⟩)");
    expect(out).not.toContain("\u001b");
  });

  it("says 1 where the basis is not good", () => {
    const { status, out, err } = runFake(["find", "n.json"], { files });
    expect({ status, err }).toEqual({ status: 1, err: "" });
    expect(out).toMatch(/^NOT GOOD/);
  });

  it("prints the states as a table in other formats", () => {
    const find = (...args: string[]): string => runFake(["find", "p.json", ...args], { files }).out;
    expect(find("--format", "csv", "--columns", "level,E0,label:A").split("\r\n")).toHaveLength(4);
    expect(find("-f", "markdown")).toMatch(/^\| level/);
    expect(find("-f", "latex")).toContain("\\begin{tabular}");
    expect(find("-f", "markdown")).toContain("All numbers of this problem are invented.");
  });

  it("prints everything as JSON", () => {
    const { out } = runFake(["find", "p.json", "--format", "json"], { files });
    const result = JSON.parse(out);
    expect(result).toMatchObject({
      format: "goodbasis-result",
      title: "A pair",
      invented: true,
      verdict: "good",
      unit: "meV",
      n: 3,
      levelCount: 2,
      couplings: [],
      questions: [],
    });
    expect(result.audit.candidates.map((c: { conserved: boolean }) => c.conserved)).toEqual([true, false]);
    expect(result.table.rows).toHaveLength(3);
    const bad = JSON.parse(runFake(["find", "n.json", "--format", "json"], { files }).out);
    expect(bad.verdict).toBe("not good");
    expect(bad.couplings[0].size).toBeCloseTo(1, 12);
  });

  it("lets its options override those of the file", () => {
    const stated = GOOD.replace('"h0"', '"options": { "levels": { "lowest": 1 } },\n  "h0"');
    const energies = (...args: string[]): number[] => {
      const { out } = runFake(["find", "s.json", "-f", "json", ...args], { files: { "s.json": stated } });
      return JSON.parse(out).levels.map(({ energy }: { energy: number }) => Number(energy.toFixed(9)));
    };
    expect(energies()).toEqual([1]);
    expect(energies("--levels", "all")).toEqual([1, 2]);
    expect(energies("--levels", "nearest:1.9")).toEqual([2]);
    expect(energies("--levels", "nearest:1.9:2")).toEqual([1, 2]);
    expect(energies("--levels=-1..1.5")).toEqual([1]);
    expect(energies("--levels", "lowest:2", "--depth", "first", "--lambda", "0.1", "--resolution", "1e-9")).toEqual([
      1, 2,
    ]);
    const labels = GOOD.replace('"h0"', '"options": { "depth": "labels" },\n  "h0"')
      .replace('"A"', '"Z"')
      .replace("[1, 0, 2]", "[0,1,2]");
    const asLabels = labels.replace(/"permutation": \[[^\]]*\]/, '"permutation": [0, 1, 2]');
    expect(runFake(["find", "s.json"], { files: { "s.json": asLabels } }).status).toBe(1);
    expect(runFake(["find", "s.json", "--depth", "full"], { files: { "s.json": asLabels } }).status).toBe(0);
  });

  it("colours the verdict on a screen, not in a file", () => {
    expect(runFake(["find", "p.json"], { files, colours: true }).out).toContain("\u001b[1;32mGOOD\u001b[0m");
    expect(runFake(["find", "n.json"], { files, colours: true }).out).toContain("\u001b[1;31mNOT\u001b[0m");
    const written = runFake(["find", "p.json", "--out", "r.txt"], { files, colours: true });
    expect(written.files.get("r.txt")).not.toContain("\u001b");
    expect(runFake(["find", "x"], { colours: true }).err).toContain("\u001b[1;31merror");
  });

  it("shows progress only on a screen and only when it takes long", () => {
    const wipe = "\r\u001b[K";
    const shown = runFake(["find", "p.json"], { files, interactive: true, tick: 600 }).err.split(wipe);
    expect(shown.at(0)).toBe("");
    expect(shown.at(-1)).toBe("");
    expect(shown.length).toBeGreaterThan(2);
    for (const line of shown.slice(1, -1)) expect(line).toMatch(/^(commutators|labels|levels).* …$/);
    expect(runFake(["find", "p.json"], { files, interactive: true, tick: 1 }).err).toBe("");
    expect(runFake(["find", "p.json"], { files, interactive: false, tick: 600 }).err).toBe("");
  });

  it("prints the first states only where there are many", () => {
    const many = JSON.stringify({
      format: "goodbasis-problem",
      formatVersion: 1,
      n: 80,
      h0: { diagonal: Array.from({ length: 80 }, (_, k) => k) },
      v: { n: 80, triplets: [] },
    });
    const { out } = runFake(["find", "m.json"], { files: { "m.json": many } });
    expect(out).toContain("20 more states: goodbasis table prints all of them");
    expect(
      runFake(["table", "m.json", "-f", "csv"], { files: { "m.json": many } })
        .out.trimEnd()
        .split("\r\n"),
    ).toHaveLength(81);
  });
});

describe("what is wrong with a problem file only when it is worked on", () => {
  const stated = GOOD.replace('"h0"', '"options": { "levels": { "from": 7, "to": 8 } },\n  "h0"');

  it("is said with its line; an option of the command line is not blamed on the file", () => {
    expect(runFake(["find", "s.json"], { files: { "s.json": stated } }).err).toMatch(
      /^error \[no-level\]: goodbasis find: s\.json, line \d+, options\.levels: no level lies between 7 and 8/,
    );
    expect(runFake(["find", "s.json", "--levels", "9..10"], { files: { "s.json": stated } }).err).toMatch(
      /^error \[no-level\]: goodbasis find: no level lies between 9 and 10/,
    );
  });

  it("as are levels that no command line may ask for", () => {
    for (const levels of ["lowest:0", "3..1", "nearest:1e999", "nearest:1:0"]) {
      expect(runFake(["find", "p.json", "--levels", levels], { files }).err).toContain(
        `--levels ${levels}: give all, lowest:3`,
      );
    }
    expect(runFake(["find", "p.json", "--lambda", "-1"], { files }).err).toContain("use '--lambda=-XYZ'");
  });
});

describe("goodbasis table", () => {
  it("prints the states and nothing else", () => {
    const { status, out } = runFake(["table", "p.json", "--columns", "level, E0, shift"], { files });
    expect(status).toBe(0);
    expect(out).toMatch(/^level +E0 +E1/);
    expect(out).not.toContain("GOOD");
    expect(runFake(["table", "n.json"], { files }).status).toBe(1);
    expect(JSON.parse(runFake(["table", "p.json", "-f", "json"], { files }).out).rows).toHaveLength(3);
  });
});

describe("goodbasis audit", () => {
  it("says 0 only where every candidate is conserved", () => {
    const { status, out } = runFake(["audit", "p.json"], { files });
    expect(status).toBe(1);
    expect(out).toContain("AUDIT: 1 of 2 candidates conserved");
    const conserved = GOOD.replace(/, *"B": \{[^}]*\}/, "").replace(/,\s*"B": \{[^}]*\}/, "");
    expect(runFake(["audit", "c.json"], { files: { "c.json": conserved } }).status).toBe(0);
    expect(runFake(["audit", "n.json"], { files }).status).toBe(0);
  });

  it("comes in every format", () => {
    const audit = (format: string): string => runFake(["audit", "p.json", "-f", format], { files }).out;
    expect(JSON.parse(audit("json")).candidates).toHaveLength(2);
    expect(audit("csv").trimEnd().split("\r\n")).toHaveLength(3);
    expect(audit("markdown")).toMatch(/^\| candidate \| kind \| with H0 \| with V \| verdict \| reason \|/);
    expect(audit("latex")).toContain("\\begin{tabular}");
  });
});

describe("goodbasis validate", () => {
  const kets = JSON.stringify([{ a: 1 }, { b: 1 }, { c: 1 }]);
  const h = Math.SQRT1_2;
  const good = JSON.stringify({
    states: [
      [h, h, 0],
      [h, -h, 0],
      [0, 0, 1],
    ],
    labels: { A: [1, -1, 1] },
  });

  it("checks a basis", () => {
    const spoilt = runFake(["validate", "p.json", "--basis", "b.json"], { files: { ...files, "b.json": kets } });
    expect(spoilt.status).toBe(1);
    expect(spoilt.out).toMatch(/NOT GOOD: the basis of 3 states/);
    expect(spoilt.out).toContain("V couples states 0 and 1: 0.5 meV");
    expect(spoilt.out).toContain("Rotations that repair it");
    const fine = runFake(["validate", "p.json", "--basis", "b.json"], { files: { ...files, "b.json": good } });
    expect(fine.status).toBe(0);
    expect(fine.out).toMatch(/GOOD: 3 states, orthonormal/);
    expect(fine.out).toContain("label A: yes");
  });

  it("comes in every format", () => {
    const validate = (format: string): string =>
      runFake(["validate", "p.json", "--basis", "b.json", "-f", format], { files: { ...files, "b.json": kets } }).out;
    expect(JSON.parse(validate("json"))).toMatchObject({ verdict: "not good", complete: true });
    expect(validate("csv")).toContain("1 (V: 0.500000)");
    expect(validate("markdown")).toMatch(/^\| state \| level \| E0/);
    expect(validate("latex")).toContain("\\begin{tabular}");
  });

  it("says what it cannot read", () => {
    const bad = (basis?: string): string => {
      const args = basis === undefined ? [] : ["--basis", "b.json"];
      const { status, err } = runFake(["validate", "p.json", ...args], { files: { ...files, "b.json": basis ?? "" } });
      expect(status).toBe(2);
      return err;
    };
    expect(bad()).toMatch(/^error \[option\]: goodbasis validate: no basis is given; add --basis PATH/);
    expect(bad('[{ "x": 1 }]')).toMatch(/^error \[file\]: .*b\.json, line 1, \[0\]\.x: expected the name of a ket/);
    expect(bad(JSON.stringify({ states: [{ a: 1 }], labels: { C: [1] } }))).toMatch(
      /^error \[name\]: .*label C is no candidate/,
    );
  });
});

describe("goodbasis recheck", () => {
  const made = runFake(["find", "p.json", "--certificate", "c.json"], { files });
  const certificate = made.files.get("c.json") ?? "";

  it("verifies what find wrote", () => {
    expect(made.status).toBe(0);
    const { status, out } = runFake(["recheck", "c.json", "p.json"], { files: { ...files, "c.json": certificate } });
    expect(out).toMatch(/^VERIFIED/);
    expect(status).toBe(0);
  });

  it("says 1 and names what was changed", () => {
    const changed = certificate.replace('"text": "+1"', '"text": "−1"');
    expect(changed).not.toBe(certificate);
    const { status, out } = runFake(["recheck", "c.json", "p.json"], { files: { ...files, "c.json": changed } });
    expect(status).toBe(1);
    expect(out).toMatch(/^REFUSED/);
    const report = JSON.parse(
      runFake(["recheck", "c.json", "p.json", "-f", "json"], { files: { ...files, "c.json": changed } }).out,
    );
    expect(report.ok).toBe(false);
    const csv = runFake(["recheck", "c.json", "p.json", "-f", "csv"], { files: { ...files, "c.json": changed } }).out;
    expect(csv).toContain("labels");
  });

  it("says 2 to a certificate of another problem, and to what is none", () => {
    const other = runFake(["recheck", "c.json", "n.json"], { files: { ...files, "c.json": certificate } });
    expect(other).toMatchObject({
      status: 2,
      err: expect.stringMatching(/^error \[wrong-problem\]: goodbasis recheck: /),
    });
    const none = runFake(["recheck", "c.json", "p.json"], { files: { ...files, "c.json": "{}" } });
    expect(none).toMatchObject({ status: 2, err: expect.stringMatching(/^error \[file\]: goodbasis recheck: /) });
    const torn = runFake(["recheck", "c.json", "p.json"], { files: { ...files, "c.json": certificate.slice(0, 100) } });
    expect(torn).toMatchObject({
      status: 2,
      err: expect.stringMatching(/^error \[file\]: goodbasis recheck: c\.json, line \d+, column/),
    });
  });

  it("reads one of its two files from standard input, not both", () => {
    expect(runFake(["recheck", "-", "-"], { files: { "-": GOOD } })).toMatchObject({
      status: 2,
      err: expect.stringContaining("cannot both come from standard input"),
    });
    expect(runFake(["recheck", "-", "p.json"], { files: { ...files, "-": "{" } }).err).toMatch(
      /^error \[file\]: goodbasis recheck: standard input, line 1, column 2: expected/,
    );
    expect(runFake(["recheck", "p.json", "p.json"], { files }).err).toMatch(
      /^error \[file\]: goodbasis recheck: the certificate is malformed/,
    );
  });
});

describe("output files", () => {
  it("are written instead of printing", () => {
    const { status, out, files: after } = runFake(["find", "p.json", "--out", "r.csv", "-f", "csv"], { files });
    expect({ status, out }).toEqual({ status: 0, out: "" });
    expect(after.get("r.csv")).toBe(runFake(["find", "p.json", "-f", "csv"], { files }).out);
  });

  it("are refused where they exist, before any work, unless forced", () => {
    const there = { ...files, "r.txt": "old", "c.json": "old" };
    for (const args of [
      ["--out", "r.txt"],
      ["--out", "new.txt", "--certificate", "c.json"],
    ]) {
      const refused = runFake(["find", "p.json", ...args], { files: there });
      expect(refused).toMatchObject({
        status: 2,
        out: "",
        err: expect.stringMatching(/^error \[output\]: .* exists already; give another path, or --force/),
      });
      expect(refused.files).toEqual(new Map(Object.entries(there)));
    }
    expect(runFake(["find", "gone.json", "--out", "r.txt"], { files: there }).err).toMatch(/^error \[output\]/);
    const forced = runFake(["find", "p.json", "--out", "r.txt", "--certificate", "c.json", "--force"], {
      files: there,
    });
    expect(forced.status).toBe(0);
    expect(forced.files.get("r.txt")).toMatch(/GOOD/);
    expect(JSON.parse(forced.files.get("c.json") ?? "").format).toBe("goodbasis-certificate");
  });

  it("need paths of their own", () => {
    const { status, err } = runFake(["find", "p.json", "--out", "r", "--certificate", "./r"], { files });
    expect(status).toBe(2);
    expect(err).toMatch(/--out and --certificate both name r; give two paths/);
  });

  it("need names that are not empty, given once", () => {
    for (const option of ["--out", "--certificate", "--levels", "--columns", "--format", "--depth"]) {
      const { status, err, files: after } = runFake(["find", "p.json", option, ""], { files });
      expect(status).toBe(2);
      expect(err).toMatch(new RegExp(`^error \\[option\\]: goodbasis find: ${option} is empty; give a value`));
      expect([...after.keys()]).toEqual(Object.keys(files));
    }
    expect(runFake(["validate", "p.json", "--basis", " "], { files }).err).toContain("--basis is empty");
    expect(runFake(["find", ""], { files }).err).toContain("the name of a file is empty");
    const twice = runFake(["find", "p.json", "--out=a", "--out=b"], { files });
    expect(twice).toMatchObject({ status: 2, err: expect.stringContaining("--out is given twice") });
    expect([...twice.files.keys()]).toEqual(Object.keys(files));
  });

  it("leave nothing behind where bad input or a full disk stops the work", () => {
    const bad = runFake(["find", "b.json", "--out", "r.txt"], { files: { "b.json": "{" } });
    expect([...bad.files.keys()]).toEqual(["b.json"]);
    const full = runFake(["find", "p.json", "--out", "r.txt"], { files, full: true });
    expect(full).toMatchObject({
      status: 2,
      out: "",
      err: expect.stringMatching(/^error \[output\]: .*r\.txt cannot be written \(ENOSPC/),
    });
  });

  it("hold a result that is not good as well, with status 1", () => {
    const { status, files: after } = runFake(["find", "n.json", "--out", "r.txt"], { files });
    expect(status).toBe(1);
    expect(after.get("r.txt")).toMatch(/^NOT GOOD/);
  });
});
