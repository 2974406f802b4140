import { sha256 } from "@noble/hashes/sha2.js";
import { bytesToHex, utf8ToBytes } from "@noble/hashes/utils.js";
import type { Certificate } from "./certificate-format.js";

/** SHA-256 of a value's JSON, with the keys of every object in alphabetical order. */
function seal(value: unknown): string {
  return bytesToHex(sha256(utf8ToBytes(JSON.stringify(value, sortedKeys))));
}

function sortedKeys(_key: string, value: unknown): unknown {
  if (typeof value !== "object" || value === null || Array.isArray(value)) return value;
  return Object.fromEntries(Object.entries(value).sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0)));
}

/**
 * The seals of a certificate: one for each section, each state and each node, by its path, such as `levels[0].states[2]`.
 *
 * They tell that and where a file was changed after it was written. They do not prove the claims: that is done by checking
 * each against the operators.
 */
export function computeSeals(certificate: Omit<Certificate, "seals">): Record<string, string> {
  const seals: Record<string, string> = {};
  for (const [section, value] of Object.entries(certificate)) {
    if (section === "seals") continue;
    if (section !== "levels") {
      seals[section] = seal(value);
      continue;
    }
    certificate.levels.forEach((level, l) => {
      const path = `levels[${l}]`;
      for (const [part, content] of Object.entries(level)) {
        if (part === "states" || part === "nodes") continue;
        seals[`${path}.${part}`] = seal(content);
      }
      level.states.forEach((state, k) => {
        seals[`${path}.states[${k}]`] = seal(state);
      });
      level.nodes.forEach((node, k) => {
        seals[`${path}.nodes[${k}]`] = seal(node);
      });
    });
  }
  return seals;
}

/** The certificate with its seals. */
export function sealCertificate(certificate: Omit<Certificate, "seals">): Certificate {
  return { ...certificate, seals: computeSeals(certificate) };
}
