import { analyze } from "#app/engine/pipeline.ts";
import type {
  Result,
  ResultWindow,
  Signals,
  TransientProtocol,
  WindowsDocument,
} from "#app/engine/types.ts";

/** One recording through the whole analysis. */
export function analyzeOne(
  signals: Signals,
  protocol: TransientProtocol,
  more: { rig?: Signals[]; windows?: WindowsDocument } = {},
): Result {
  return analyze({
    protocol,
    protocolSha256: "protocol",
    recordings: [{ file: "recording.csv", sha256: "recording", signals }],
    rig: (more.rig ?? []).map((each, i) => ({
      file: `empty-${i}.csv`,
      sha256: `empty-${i}`,
      signals: each,
    })),
    windows: more.windows ?? null,
  });
}

export function onlyWindow(result: Result): ResultWindow {
  if (result.windows.length !== 1) throw new Error(`${result.windows.length} windows, not one`);
  return result.windows[0] as ResultWindow;
}

export function codesOf({ flags }: { flags: { code: string }[] }): string[] {
  return flags.map(({ code }) => code);
}
