import { fileURLToPath } from "node:url";
import { defineConfig, type ViteUserConfig } from "vitest/config";
import { snippetModules } from "./docs/snippet-modules.js";

const root = fileURLToPath(new URL("..", import.meta.url));

const config: ViteUserConfig = defineConfig({
  root,
  plugins: [snippetModules(root)],
  resolve: {
    alias: [
      { find: /^goodbasis$/, replacement: `${root}src/index.ts` },
      { find: /^goodbasis\/kernels$/, replacement: `${root}src/numerics/kernels.ts` },
    ],
  },
  test: {
    include: ["test/**/*.test.ts"],
    globalSetup: ["test/build.ts"],
    testTimeout: 60_000,
    typecheck: {
      enabled: true,
      include: ["test/types/**/*.test-d.ts"],
      tsconfig: "test/types/tsconfig.json",
      ignoreSourceErrors: true,
    },
    coverage: {
      provider: "v8",
      include: ["src/**/*.ts"],
      // compiled to WebAssembly, where coverage does not reach
      exclude: ["src/numerics/wasm/assembly/**"],
      reporter: ["text-summary", "json-summary", "html"],
      reportsDirectory: "coverage",
    },
  },
});

export default config;
