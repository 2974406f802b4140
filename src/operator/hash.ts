import { sha256 } from "@noble/hashes/sha2.js";
import { bytesToHex, utf8ToBytes } from "@noble/hashes/utils.js";
import type { Uncertain } from "./radius.js";

const LITTLE_ENDIAN = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;

/**
 * SHA-256 over dimension, pattern, values and radii, all as little-endian bytes, in hexadecimal. Negative zeros count as zeros.
 */
export function hashOf(matrix: Uncertain): string {
  const { csr, radius } = matrix;
  const hash = sha256.create();
  const kind = radius instanceof Float64Array ? "entries" : radius;
  hash.update(utf8ToBytes(`goodbasis operator ${csr.rows} ${csr.im === undefined ? "real" : "complex"} ${kind} `));
  hash.update(bytesOf(csr.ptr));
  hash.update(bytesOf(csr.col));
  hash.update(bytesOf(withoutNegativeZeros(csr.re)));
  if (csr.im !== undefined) hash.update(bytesOf(withoutNegativeZeros(csr.im)));
  if (radius instanceof Float64Array) hash.update(bytesOf(radius));
  return bytesToHex(hash.digest());
}

function withoutNegativeZeros(values: Float64Array): Float64Array {
  for (let e = 0; e < values.length; e++) if (Object.is(values[e], -0)) return values.map((x) => x + 0);
  return values;
}

function bytesOf(values: Int32Array | Float64Array): Uint8Array {
  const bytes = new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
  if (LITTLE_ENDIAN) return bytes;
  const width = values.BYTES_PER_ELEMENT;
  const out = new Uint8Array(bytes.length);
  for (let k = 0; k < bytes.length; k++) out[k] = bytes[k - (k % width) + width - 1 - (k % width)] as number;
  return out;
}
