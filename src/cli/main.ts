#!/usr/bin/env node
import { run } from "./run.js";
import { processTerminal } from "./terminal.js";

process.stdout.on("error", (error: NodeJS.ErrnoException) => {
  // A reader such as head that has seen enough closes the pipe.
  if (error.code !== "EPIPE") throw error;
});
process.exitCode = run(process.argv.slice(2), processTerminal());
