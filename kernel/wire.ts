import { createHmac, randomUUID, timingSafeEqual } from "node:crypto";

/** Header of every message (Jupyter messaging specification 5.3, "General Message Format"). */
export interface Header {
  readonly msg_id: string;
  readonly session: string;
  readonly username: string;
  readonly date: string;
  readonly msg_type: string;
  readonly version: string;
}

export type Json = Readonly<Record<string, unknown>>;

export interface Message {
  readonly identities: readonly Uint8Array[];
  readonly header: Header;
  readonly parentHeader: Json;
  readonly metadata: Json;
  readonly content: Json;
  readonly buffers: readonly Uint8Array[];
}

export type Parsed = { readonly message: Message } | { readonly refused: string };

export const protocolVersion = "5.3";
const delimiter = Buffer.from("<IDS|MSG>");

/** Signatures remembered to refuse a replayed message; the oldest are forgotten. */
const rememberedSignatures = 65536;

export interface Wire {
  /** Parses frames; the signature is verified before any JSON is looked at. */
  parse(frames: readonly Uint8Array[]): Parsed;
  /** Frames of a message, signed. */
  assemble(options: {
    readonly identities: readonly (Uint8Array | string)[];
    readonly type: string;
    readonly parent: Header | null;
    readonly content: Json;
    readonly metadata?: Json;
  }): Buffer[];
}

function objectOf(frame: Uint8Array): Json | null {
  try {
    const value: unknown = JSON.parse(Buffer.from(frame).toString("utf8"));
    return typeof value === "object" && value !== null && !Array.isArray(value) ? (value as Json) : null;
  } catch {
    return null;
  }
}

function headerOf(value: Json): Header | null {
  const text = (key: string) => (typeof value[key] === "string" ? (value[key] as string) : null);
  const id = text("msg_id");
  const type = text("msg_type");
  if (id === null || type === null) return null;
  // The whole header goes back as parent_header, so unknown fields are kept.
  return {
    ...value,
    msg_id: id,
    msg_type: type,
    session: text("session") ?? "",
    username: text("username") ?? "",
    date: text("date") ?? "",
    version: text("version") ?? protocolVersion,
  };
}

/**
 * The wire format: frames to messages and back.
 * @param key key of the connection file; empty means that messages are not signed
 * @param session identity of this kernel process, constant over its life
 */
export function createWire(key: string, session: string): Wire {
  const seen = new Set<string>();
  const signatureOf = (parts: readonly Uint8Array[]): string => {
    if (key === "") return "";
    const hmac = createHmac("sha256", key);
    for (const part of parts) hmac.update(part);
    return hmac.digest("hex");
  };

  function verified(signature: string, parts: readonly Uint8Array[]): string | null {
    if (key === "") return null;
    const expected = Buffer.from(signatureOf(parts));
    const given = Buffer.from(signature);
    if (given.length !== expected.length || !timingSafeEqual(given, expected)) return "wrong signature";
    if (seen.has(signature)) return "replayed signature";
    seen.add(signature);
    if (seen.size > rememberedSignatures) seen.delete(seen.values().next().value!);
    return null;
  }

  return {
    parse(frames) {
      const start = frames.findIndex((frame) => Buffer.compare(Buffer.from(frame), delimiter) === 0);
      if (start < 0) return { refused: "no delimiter" };
      const parts = frames.slice(start + 2, start + 6);
      if (frames.length < start + 6) return { refused: "too few frames" };
      const wrong = verified(Buffer.from(frames[start + 1]!).toString("latin1"), parts);
      if (wrong !== null) return { refused: wrong };
      const [header, parentHeader, metadata, content] = parts.map(objectOf);
      if (!header || !parentHeader || !metadata || !content) return { refused: "a frame is not a JSON object" };
      const read = headerOf(header);
      if (read === null) return { refused: "the header lacks msg_id or msg_type" };
      return {
        message: {
          identities: frames.slice(0, start).map((frame) => Buffer.from(frame)),
          header: read,
          parentHeader,
          metadata,
          content,
          buffers: frames.slice(start + 6),
        },
      };
    },
    assemble({ identities, type, parent, content, metadata }) {
      const header: Header = {
        msg_id: randomUUID(),
        session,
        username: "kernel",
        date: new Date().toISOString(),
        msg_type: type,
        version: protocolVersion,
      };
      const parts = [header, parent ?? {}, metadata ?? {}, content].map((part) => Buffer.from(JSON.stringify(part)));
      return [
        ...identities.map((identity) => (typeof identity === "string" ? Buffer.from(identity) : Buffer.from(identity))),
        delimiter,
        Buffer.from(signatureOf(parts)),
        ...parts,
      ];
    },
  };
}
