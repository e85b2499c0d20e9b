import type { ReactNode } from "react";
import { formatDigits, TERM_UNITS } from "#app/domain/quantity.ts";
import { type Result, TERMS } from "#app/engine/types.ts";

/** What the numbers come from: bytes, protocol in words, engine, rig. */
export function Provenance({
  result,
  protocolNumber,
  protocolSha256,
  choices,
  downloads,
}: {
  result: Result;
  protocolNumber: number;
  protocolSha256: string;
  /** The protocol's choices, one line each. */
  choices: readonly { label: string; value: string }[];
  downloads: ReactNode;
}) {
  const [recording] = result.recordings;
  return (
    <section aria-labelledby="provenance">
      <h2 className="mb-1" id="provenance">
        Where these numbers come from
      </h2>
      <div className="grid gap-x-8 gap-y-4 lg:grid-cols-2">
        <div>
          <h3 className="mb-1">Recording and engine</h3>
          <dl>
            <Line label="File">
              <span className="font-mono">{recording?.file}</span>
            </Line>
            <Line label="Its SHA-256">
              <span className="font-mono text-sm break-all">{recording?.sha256}</span>
            </Line>
            <Line label="Samples">
              <span className="num">
                {recording?.samples} at {formatDigits(recording?.rate_hz, 4)} Hz,{" "}
                {formatDigits(recording?.duration_s, 4)} s
              </span>
            </Line>
            <Line label="Gaps, duplicates, missing">
              <span className="num">
                {recording?.gaps}, {recording?.duplicates}, {recording?.missing}
              </span>
            </Line>
            <Line label="SHA-256 of the protocol">
              <span className="font-mono text-sm break-all">{protocolSha256}</span>
            </Line>
            <Line label="Engine">
              <span className="font-mono">{result.engine}</span>
            </Line>
            {Object.entries(result.rig).map(([axis, rig]) => (
              <Line key={axis} label={`The rig’s own, ${axis}`}>
                <span className="font-mono text-sm">
                  {TERMS.map(
                    (term) => `${term} ${formatDigits(rig[term], 3)} ${TERM_UNITS[term]}`,
                  ).join(", ")}
                </span>
              </Line>
            ))}
            <Line label="Downloads">{downloads}</Line>
          </dl>
        </div>
        <div>
          <h3 className="mb-1">Protocol, version {protocolNumber}</h3>
          <dl>
            {choices.map(({ label, value }) => (
              <Line key={label} label={label}>
                {value}
              </Line>
            ))}
          </dl>
        </div>
      </div>
    </section>
  );
}

function Line({ label, children }: { label: string; children: ReactNode }) {
  return (
    <div className="grid grid-cols-[minmax(0,2fr)_minmax(0,3fr)] gap-3 border-b border-rule py-1">
      <dt className="text-ink-2">{label}</dt>
      <dd className="min-w-0">{children}</dd>
    </div>
  );
}
