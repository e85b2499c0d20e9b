import { decode } from "#app/engine/parse/decode.ts";
import { findLayout, HEAD_BYTES } from "#app/engine/parse/layout.ts";
import type { TablePreview, TableProtocol } from "#app/engine/types.ts";

/**
 * What a file's first part looks like, for the person who maps its columns.
 *
 * @param head  the file's first bytes; 256 KiB suffice, and a head of that length or more is taken
 *   for a part of a longer file
 * @throws EngineError "unreadable" where the head is no table of numbers with names above it
 */
export function previewTable(head: Uint8Array, table: TableProtocol): TablePreview {
  const cut = head.length >= HEAD_BYTES;
  const decoded = decode(head, cut);
  const { dialect, header, units, rows, preamble } = findLayout(decoded, table, cut);
  return { dialect, header, units, rows, preamble, flags: decoded.flags };
}
