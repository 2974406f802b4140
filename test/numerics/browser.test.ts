import { spawn } from "node:child_process";
import { existsSync, mkdtempSync, readFileSync } from "node:fs";
import { rm } from "node:fs/promises";
import { createServer, type Server } from "node:http";
import type { AddressInfo } from "node:net";
import { tmpdir } from "node:os";
import { delimiter, join } from "node:path";
import { describe, expect, it } from "vitest";
import { batchedHermitianEigen } from "../../src/numerics/eigen/batch.js";
import { builtPackage } from "../build.js";
import { randomSample } from "./eigen/matrices.js";

/** A browser on the path that runs without a window. */
const browser = (process.env["PATH"] ?? "")
  .split(delimiter)
  .flatMap((folder) =>
    ["chromium", "chromium-browser", "google-chrome", "google-chrome-stable"].map((name) => join(folder, name)),
  )
  .find((path) => existsSync(path));

const matrices = Array.from({ length: 60 }, (_, k) => randomSample((k * 7) % 23, true, k + 1));
const batch = {
  orders: matrices.map(({ n }) => n),
  re: matrices.flatMap(({ re }) => [...re]),
  im: matrices.flatMap(({ im = [] }) => [...im]),
};

/** What a page tells of itself. */
interface Told {
  readonly isolated: boolean;
  readonly kernels: boolean;
  readonly running: number;
  readonly alone: string[];
  readonly pooled: string[];
  readonly death: { readonly code: string; readonly message: string };
  readonly left: { readonly code: string; readonly message: string };
}

const WORKER = `import { serveWebWorker } from "/numerics/kernels.js"; serveWebWorker(self);`;
const DYING = `self.addEventListener("message", () => { throw new Error("out of order"); });`;
const LEAVING = `self.addEventListener("message", () => self.close());\n${WORKER}`;
const PAGE = `<!doctype html><title>kernels</title><script type="module">
  import { batchedHermitianEigen, KernelPool, kernelsAvailable, webWorker } from "/numerics/kernels.js";

  const bits = ({ values, re, im }) => [values, re, im].map((m) => new BigUint64Array(m.slice().buffer).join());
  const poolOf = (script, size) =>
    new KernelPool({ factory: () => webWorker(new Worker(script, { type: "module" })), size, worthwhile: 0 });

  async function tell() {
    const { orders, re, im } = await (await fetch("/batch")).json();
    const input = [orders, Float64Array.from(re), Float64Array.from(im)];
    const pool = poolOf("/worker.js", 2);
    const pooled = bits(await pool.batchedHermitianEigen(...input));
    const { running } = pool;
    pool.close();
    const endOf = (script) =>
      poolOf(script, 1)
        .batchedHermitianEigen(...input)
        .then(() => ({ code: "none" }), ({ code, message }) => ({ code, message }));
    const death = await endOf("/dying.js");
    const left = await endOf("/leaving.js");
    const alone = bits(batchedHermitianEigen(...input));
    return { isolated: crossOriginIsolated, kernels: kernelsAvailable(), running, alone, pooled, death, left };
  }
  const told = await tell().catch((error) => ({ error: String(error) }));
  await fetch("/told", { method: "POST", body: JSON.stringify(told) });
</script>`;

/** Serves the page and the built package on this machine alone; hands on what the page tells. */
function serve(isolated: boolean, told: (text: string) => void): Promise<Server> {
  const server = createServer((request, response) => {
    const { pathname } = new URL(request.url ?? "/", "http://localhost");
    if (isolated) {
      response.setHeader("Cross-Origin-Opener-Policy", "same-origin");
      response.setHeader("Cross-Origin-Embedder-Policy", "require-corp");
    }
    if (request.method === "POST") {
      let text = "";
      request.on("data", (part) => {
        text += String(part);
      });
      request.on("end", () => {
        response.end();
        told(text);
      });
      return;
    }
    const [type, text] = fileAt(pathname) ?? [];
    response.statusCode = text === undefined ? 404 : 200;
    if (type !== undefined) response.setHeader("Content-Type", type);
    response.end(text);
  });
  return new Promise((resolve) => server.listen(0, "localhost", () => resolve(server)));
}

/** Media type and text of what the page asks for. */
function fileAt(pathname: string): readonly [type: string, text: string] | undefined {
  if (pathname === "/") return ["text/html", PAGE];
  if (pathname === "/batch") return ["application/json", JSON.stringify(batch)];
  if (pathname === "/worker.js") return ["text/javascript", WORKER];
  if (pathname === "/dying.js") return ["text/javascript", DYING];
  if (pathname === "/leaving.js") return ["text/javascript", LEAVING];
  const path = join(builtPackage, pathname);
  return /^\/[\w/-]+\.js$/.test(pathname) && existsSync(path)
    ? ["text/javascript", readFileSync(path, "utf8")]
    : undefined;
}

/** Opens the page in a browser without a window and waits for what it tells. */
async function visit(path: string, isolated: boolean): Promise<Told> {
  const profile = mkdtempSync(join(tmpdir(), "browser-"));
  let tell: (text: string) => void = () => undefined;
  const told = new Promise<string>((resolve) => {
    tell = resolve;
  });
  const server = await serve(isolated, tell);
  const { port } = server.address() as AddressInfo;
  // Browsers refuse to build their sandbox for the superuser of a container.
  const sandbox = process.getuid?.() === 0 ? ["--no-sandbox"] : [];
  const flags = ["--headless", "--disable-gpu", "--disable-dev-shm-usage", "--no-first-run", ...sandbox];
  const child = spawn(path, [...flags, `--user-data-dir=${profile}`, `http://localhost:${port}/`], { stdio: "ignore" });
  const gone = new Promise<never>((_, reject) => {
    child.on("error", reject);
    child.on("exit", (code) => reject(new Error(`the browser ended by itself, exit code ${code}`)));
  });
  try {
    return JSON.parse(await Promise.race([told, gone])) as Told;
  } finally {
    gone.catch(() => undefined);
    const ended = new Promise((resolve) => child.once("exit", resolve));
    if (child.kill()) await ended;
    server.close();
    // the browser's own processes may write to its profile for a moment after it has ended
    await rm(profile, { recursive: true, force: true, maxRetries: 10, retryDelay: 100 });
  }
}

const bits = (m: Float64Array): string => new BigUint64Array(m.slice().buffer).join();

if (browser === undefined) {
  console.warn("skipped: no Chromium or Chrome on the path, so the workers of a browser are not tried");
}

describe("Web Workers of a browser", () => {
  it.skipIf(browser === undefined).each([
    ["with shared memory, on an isolated page", true],
    ["with matrices moved to and fro, on any page", false],
  ])("find the bits of the main thread and of Node (%s)", async (_, isolated) => {
    const told = await visit(browser ?? "", isolated);
    const { values, re, im } = batchedHermitianEigen(
      batch.orders,
      Float64Array.from(batch.re),
      Float64Array.from(batch.im),
    );
    expect(told).toMatchObject({ isolated, kernels: true, running: 2, death: { code: "worker" } });
    expect(told.death.message).toMatch(/matri(x|ces) 0.*out of order/);
    expect(told.left).toMatchObject({ code: "worker", message: expect.stringMatching(/it closed itself/) });
    expect(told.pooled).toEqual(told.alone);
    expect(told.alone).toEqual([values, re, im ?? new Float64Array(0)].map(bits));
  });
});
