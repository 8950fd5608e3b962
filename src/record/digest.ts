import { sha256 } from "@noble/hashes/sha2.js";
import { bytesToHex, utf8ToBytes } from "@noble/hashes/utils.js";
import canonicalize from "canonicalize";

/**
 * Canonical JSON text of a plain value (RFC 8785): one text for one value, whoever writes it.
 * @throws TypeError when the value holds something JSON cannot say (NaN, functions, cycles)
 */
export function canonicalJson(value: unknown): string {
  const write = canonicalize as unknown as (value: unknown) => string | undefined;
  const text = write(value);
  if (text === undefined) throw new TypeError("This value has no JSON form.");
  return text;
}

/** SHA-256 (FIPS 180-4) of bytes, or of a text in UTF-8; 64 hexadecimal digits. */
export function digestOf(content: Uint8Array | string): string {
  return bytesToHex(sha256(typeof content === "string" ? utf8ToBytes(content) : content));
}

/** SHA-256 of the canonical JSON of a value. */
export function digestOfValue(value: unknown): string {
  return digestOf(canonicalJson(value));
}
