import {
  firstMovement,
  previewTable,
  proposeChannels,
  readRecording,
} from "#app/engine/pipeline.ts";
import type {
  AxisMovement,
  FileHead,
  FileReading,
  Protocol,
  TableProtocol,
} from "#app/engine/types.ts";

/** So much of a file tells how it is laid out. */
const HEAD_BYTES = 256 * 1024;

/**
 * A glance at a file that is not taken in yet; only its first part is read.
 *
 * @param axes  the study's: their names, and what they are called in words
 */
export async function lookAtHead(
  file: Blob,
  table: TableProtocol,
  axes: readonly { name: string; label: string }[],
): Promise<FileHead> {
  const head = new Uint8Array(await file.slice(0, HEAD_BYTES).arrayBuffer());
  try {
    const preview = previewTable(head, table);
    return { status: "read", preview, proposed: proposeChannels(preview, axes) };
  } catch (error) {
    return refusedBy(error);
  }
}

/** Reads a whole file with a map, as the server will: what it holds, or why it cannot be read. */
export async function readWhole(file: Blob, protocol: Protocol): Promise<FileReading> {
  const bytes = new Uint8Array(await file.arrayBuffer());
  try {
    const signals = readRecording(bytes, protocol);
    const { samples, rateHz, durationS, gaps, duplicates, missing, flags } = signals;
    return {
      status: "read",
      facts: { samples, rateHz, durationS, gaps, duplicates, missing, flags },
      movements: protocol.axes.map(({ name, positive, negative }): AxisMovement => {
        const found = firstMovement(signals, name, positive, negative);
        if (found === null) return { axis: name, status: "still" };
        return {
          axis: name,
          status: "moved",
          onsetS: found.atS,
          amplitudeDeg: found.direction === positive ? found.amplitudeDeg : -found.amplitudeDeg,
          torqueSign: found.torqueSign,
        };
      }),
    };
  } catch (error) {
    return refusedBy(error);
  }
}

/** Names are compared, not classes: the engine's own errors carry their code in `name`. */
function refusedBy(error: unknown): { status: "refused"; sentence: string; line: number | null } {
  if (error instanceof Error && (error.name === "unreadable" || error.name === "protocol")) {
    const { line } = error as Error & { line?: number | null };
    return { status: "refused", sentence: error.message, line: line ?? null };
  }
  throw error;
}
