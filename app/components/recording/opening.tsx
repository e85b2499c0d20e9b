import type { ReactNode } from "react";
import { Button } from "#app/components/button.tsx";
import { Mark } from "#app/components/mark.tsx";
import { formatBytes } from "#app/domain/quantity.ts";

const STEPS = {
  fetching: "Fetching",
  reading: "Reading",
  preparing: "Filtering",
} as const;

/** The page's bones while the recording comes in: how far it is stands in words and as a line. */
export function Opening({
  fileName,
  progress,
}: {
  fileName: string;
  progress: { step: keyof typeof STEPS; bytesRead: number; bytesTotal: number } | null;
}) {
  const share =
    progress === null || progress.bytesTotal === 0 ? 0 : progress.bytesRead / progress.bytesTotal;
  return (
    <div aria-busy="true" className="flex min-h-[60dvh] flex-col gap-2">
      <p className="text-sm text-ink-2" role="status">
        {STEPS[progress?.step ?? "fetching"]} <span className="font-mono">{fileName}</span>
        {progress?.step === "fetching" ? (
          <span className="num">
            {" "}
            {formatBytes(progress.bytesRead)} of {formatBytes(progress.bytesTotal)}
          </span>
        ) : null}
      </p>
      <div className="h-px bg-rule">
        <div
          className="h-px bg-ink motion-safe:transition-[width]"
          style={{ width: `${Math.round(share * 100)}%` }}
        />
      </div>
      <div className="h-[34px] border border-rule md:ml-[100px]" />
      {["Angle", "Velocity", "Torque", "Residual"].map((title) => (
        <div className="grid flex-1 md:grid-cols-[100px_1fr]" key={title}>
          <span className="hidden text-sm text-ink-2 md:block">{title}</span>
          <div className="min-h-20 border border-rule" />
        </div>
      ))}
    </div>
  );
}

/** What each kind of failure asks for. */
const WHAT_TO_DO: Record<string, string> = {
  unreadable: "Check the file and its channel map; a corrected map is made by taking it in again.",
  protocol: "Choose another protocol version, or make one that suits this recording.",
  unreachable: "Check the connection and try again. Unsaved edits are kept on this computer.",
  missing: "Tell the lab’s manager: the recording’s row is here, its file is not.",
  signed_out: "Sign in again; unsaved edits are kept on this computer.",
  changed: "Do not use it, and tell the lab’s manager.",
  stopped: "Start it again. Unsaved edits are kept on this computer.",
};

/** The recording could not be opened: what happened, what to do, and another try. */
export function CannotOpen({
  problem,
  onRetry,
  children,
}: {
  problem: { code: string; text: string };
  onRetry: () => void;
  children?: ReactNode;
}) {
  return (
    <div className="flex max-w-prose flex-col items-start gap-3 py-6" role="alert">
      <span className="text-aside">
        <Mark size="sketch" />
      </span>
      <p className="font-semibold">{problem.text}</p>
      <p>{WHAT_TO_DO[problem.code] ?? WHAT_TO_DO.stopped}</p>
      <div className="flex flex-wrap gap-2">
        <Button look="do" onClick={onRetry} type="button">
          Try again
        </Button>
        {children}
      </div>
    </div>
  );
}
