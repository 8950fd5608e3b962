import { closeSync, openSync, readSync } from "node:fs";
import { type ChunkAnswer, ChunkKernel, type KernelPlan, type SubjectAnswer } from "./chunk-kernel.ts";
import { TableKernel, type TablePlan } from "./table-kernel.ts";

const newline = 10;

export interface WorkerPlan {
  readonly path: string;
  readonly kernel: KernelPlan;
  /** Set where rows must be laid out as a table first: derived columns or exclusions. */
  readonly table: TablePlan | null;
  /** Where the data begin and end in the file. */
  readonly dataStart: number;
  readonly dataEnd: number;
}

/** A part of the file; `from` is exact when `aligned`, otherwise the first record after it is meant. */
export interface Part {
  readonly from: number;
  readonly to: number;
  readonly aligned: boolean;
  /** Bytes read behind the part, in which its last record ends. */
  readonly margin: number;
}

/** Reads parts of one file; a worker has one, or the caller where there are no workers. */
export class PartReader {
  readonly #plan: WorkerPlan;
  readonly #file: number;
  readonly #kernel: ChunkKernel | TableKernel;
  #buffer = new Uint8Array(0);
  constructor(plan: WorkerPlan) {
    this.#plan = plan;
    this.#file = openSync(plan.path, "r");
    this.#kernel = plan.table === null ? new ChunkKernel(plan.kernel) : new TableKernel(plan.kernel, plan.table);
  }

  close(): void {
    closeSync(this.#file);
  }

  subjects(): SubjectAnswer | null {
    return this.#kernel.subjects();
  }

  read(part: Part): ChunkAnswer {
    const { dataEnd } = this.#plan;
    // One byte more in front tells whether the part begins on a record.
    const offset = part.aligned ? part.from : part.from - 1;
    let wanted = Math.min(part.to + part.margin, dataEnd) - offset;
    let length = this.#fill(offset, 0, wanted);
    const to = part.to - offset;
    // A value in quotes that runs on behind is found out by the one who cuts the file, who then asks with more margin.
    while (offset + length < dataEnd && this.#buffer.subarray(to, length).indexOf(newline) < 0) {
      const next = Math.min(wanted * 2, dataEnd - offset);
      length += this.#fill(offset, length, next - length);
      if (length < next) break;
      wanted = next;
    }
    const bytes = this.#buffer;
    // A line end behind everything: no loop needs to look for the end of the data.
    bytes[length] = newline;
    bytes[length + 1] = newline;
    let from = 0;
    if (!part.aligned) {
      from = bytes.indexOf(newline) + 1;
      if (from === 0 || from > length) from = length;
    }
    return this.#kernel.read(bytes, Math.min(from, length), Math.min(to, length), length, offset);
  }

  #fill(offset: number, at: number, length: number): number {
    if (this.#buffer.length < at + length + 2) {
      const next = new Uint8Array(at + length + 2);
      next.set(this.#buffer.subarray(0, at));
      this.#buffer = next;
    }
    let read = 0;
    while (read < length) {
      const got = readSync(this.#file, this.#buffer, at + read, length - read, offset + at + read);
      if (got === 0) break;
      read += got;
    }
    return read;
  }
}
