import { existsSync, readdirSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { toJsonSchema } from "@valibot/to-json-schema";
import * as v from "valibot";
import { describe, expect, it } from "vitest";
import { anyMatrix } from "../../src/problem/matrix-schema.js";
import { problemSchema } from "../../src/problem/schema.js";
import { fileNumber, index, positiveWhole } from "../../src/problem/schema-parts.js";
import { file, readFields } from "./files.js";

const root = fileURLToPath(new URL("../../", import.meta.url));
const examples = readdirSync(`${root}docs/examples`).filter((name) => name.endsWith(".json"));

/** The published JSON Schema; `npm run schema` writes it anew. */
function publishedSchema(): string {
  const { $schema, ...schema } = toJsonSchema(problemSchema, {
    ignoreActions: ["finite"],
    definitions: { matrix: anyMatrix, number: fileNumber, index, positiveWhole },
  });
  const text = JSON.stringify({ $schema, $id: "goodbasis/problem-schema.json", ...schema }, undefined, 2);
  return `${text.replace(/\[\s+("[^"\n]*"(?:,\s+"[^"\n]*")*)\s+\]/g, (_, list: string) => `[${list.replace(/,\s+/g, ", ")}]`)}\n`;
}

describe("the JSON Schema of problem files", () => {
  it("is the published one", async () => {
    await expect(publishedSchema()).toMatchFileSnapshot("../../docs/problem-schema.json");
  });

  it("is what the package exports", () => {
    const { exports, files } = JSON.parse(readFileSync(`${root}package.json`, "utf8"));
    expect(exports["./problem-schema.json"]).toBe("./docs/problem-schema.json");
    expect(files).toContain("docs/problem-schema.json");
    expect(existsSync(`${root}docs/problem-schema.json`)).toBe(true);
  });

  it("describes every form of a matrix", () => {
    const schema = publishedSchema();
    for (const form of [
      "rows",
      "triplets",
      "diagonal",
      "permutation",
      "matrixMarket",
      "terms",
      "hopping",
      "exchange",
    ]) {
      expect(schema).toContain(`"${form}"`);
    }
  });

  for (const name of examples) {
    it(`takes docs/examples/${name}`, () => {
      expect(
        v.safeParse(problemSchema, JSON.parse(readFileSync(`${root}docs/examples/${name}`, "utf8"))).issues,
      ).toBeUndefined();
    });
  }

  const good: Readonly<Record<string, Record<string, unknown>>> = {
    rows: {
      h0: [
        [1, "i"],
        [[0, -1], 1],
      ],
      v: {
        rows: [
          [0, 0],
          [0, 0],
        ],
        uncertainty: "exact",
      },
    },
    triplets: {
      n: 2,
      h0: {
        triplets: [
          [0, 0, 1],
          [1, 1, 1, 0],
        ],
        radii: [0, 0],
      },
      v: { n: 2, triplets: [] },
    },
    hopping: { n: 2, h0: { hopping: [[0, 1]], amplitude: -1 }, v: { hopping: [[0, 1]], amplitudes: ["i"] } },
    space: {
      space: [
        { name: "r", spin: 0.5, count: 2 },
        { name: "q", oscillator: 2 },
        { name: "d", dimension: 2, kets: ["g", "e"] },
      ],
      h0: { terms: [{ coefficient: 2, dot: ["r[i]", "r[j]"], bonds: [[0, 1]] }] },
      v: { a: "q.number + d.|g><g|", b: { diagonal: [1, 2], on: "d", uncertainty: { relative: 1e-9 } } },
      define: { T: { translation: "r" } },
      candidates: {
        R: { operator: { reflection: "r", centre: 1 }, label: "parity" },
        P: { sitePermutation: [1, 0], on: "r" },
        E: { operator: { exchange: ["r[0]", "r[1]"] }, label: { root: 2 } },
        D: { permutation: [1, 0], phases: [1, -1], on: "d" },
        Z: { operator: "r.total.z", label: { rational: 2 }, ladder: "r.total.plus" },
        T: "T",
      },
      options: { levels: { from: 0, to: 1 }, refuseAbove: 2 },
    },
    "exact numbers": {
      n: 2,
      h0: {
        triplets: [
          [0, 0, "sqrt(2/3)"],
          [1, 1, "√3/2", "0"],
        ],
      },
      v: { triplets: [[0, 1, 0.5]], radii: [1e-9], exact: ["1/2"] },
      candidates: {
        rows: [
          ["\\frac{1}{2}", "(1+2i)/sqrt(5)"],
          ["−i", 1],
        ],
        sum: { terms: [{ coefficient: "1/3", product: ["identity"] }] },
        hop: { hopping: [[0, 1]], amplitudes: ["sqrt(2)"] },
      },
    },
  };
  for (const [name, fields] of Object.entries(good)) {
    it(`takes what readProblem takes: ${name}`, () => {
      expect(() => readFields(fields)).not.toThrow();
      expect(v.safeParse(problemSchema, file(fields)).issues).toBeUndefined();
    });
  }

  const bad: Readonly<Record<string, Record<string, unknown>>> = {
    "an unknown field": { nn: 1 },
    "an unknown form": { h0: { diag: [1] } },
    "a wrong number": { h0: [["1+x"]] },
    "a wrong label": { candidates: { A: { operator: [[1]], label: "M" } } },
    "a negative index": { n: 1, h0: { triplets: [[-1, 0, 1]] } },
    "a factor of no kind": { space: [{ name: "a" }] },
    "a wrong option": { options: { depth: 3 } },
  };
  for (const [name, fields] of Object.entries(bad)) {
    it(`refuses what readProblem refuses: ${name}`, () => {
      expect(() => readFields(fields)).toThrow();
      expect(v.safeParse(problemSchema, file(fields)).success).toBe(false);
    });
  }
});
