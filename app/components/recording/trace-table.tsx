import { useState } from "react";
import { Button } from "#app/components/button.tsx";
import { formatNumber } from "#app/domain/quantity.ts";
import type { Stretch, WindowDrawing } from "#app/engine/types.ts";

const MOST_ROWS = 2000;

interface Row {
  key: number;
  cells: string[];
}

const HEADS = ["Angle °", "Velocity °/s", "Torque N·m", "Modelled N·m", "Residual N·m"];

/** What the traces show, as numbers: for screen readers and for copying. */
export function TraceTable({
  stretch,
  drawings,
  originS,
}: {
  stretch: Stretch;
  drawings: readonly WindowDrawing[];
  /** Zero of the time column in ms; null for seconds in the recording. */
  originS: number | null;
}) {
  const [copied, setCopied] = useState<boolean | null>(null);
  const rows = rowsOf(stretch, drawings, originS);
  const heads = [originS === null ? "Time s" : "Time ms", ...HEADS];

  async function copy() {
    const text = [heads, ...rows.map((row) => row.cells)].map((line) => line.join("\t")).join("\n");
    try {
      await navigator.clipboard.writeText(text.replaceAll("−", "-").replaceAll("–", ""));
      setCopied(true);
    } catch {
      setCopied(false);
    }
  }

  return (
    <section aria-label="Traces as a table" className="mb-4">
      <div className="mb-1 flex items-center gap-2">
        <h2>Traces as a table</h2>
        <Button look="quiet" onClick={copy} type="button">
          Copy
        </Button>
        <span className="text-sm text-ink-2" role="status">
          {copied === true
            ? "Copied."
            : copied === false
              ? "This browser does not let it be copied."
              : ""}
        </span>
      </div>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls by itself is reached by the keyboard. */}
      <div className="wide max-h-80 overflow-y-auto border border-rule" tabIndex={0}>
        <table className="rows">
          <thead>
            <tr>
              {heads.map((head) => (
                <th className="r px-2" key={head} scope="col">
                  {head}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.slice(0, MOST_ROWS).map((row) => (
              <tr key={row.key}>
                {row.cells.map((cell, i) => (
                  <td className="r num px-2" key={heads[i]}>
                    {cell}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </section>
  );
}

/** One row for each sample that is drawn; a sample outside every window has no model. */
function rowsOf(
  stretch: Stretch,
  drawings: readonly WindowDrawing[],
  originS: number | null,
): Row[] {
  const fitted = new Map<number, { modelled: number; residual: number }>();
  for (const { lines } of drawings) {
    if (lines === null) continue;
    for (let i = 0; i < lines.timeS.length; i++) {
      fitted.set(lines.timeS[i] as number, {
        modelled: lines.modelledNm[i] as number,
        residual: lines.residualNm[i] as number,
      });
    }
  }
  return Array.from(stretch.timeS, (timeS, i) => {
    const fit = fitted.get(timeS);
    return {
      key: i,
      cells: [
        originS === null ? formatNumber(timeS, 4) : formatNumber((timeS - originS) * 1000, 2),
        formatNumber(stretch.angleDeg[i], 4),
        formatNumber(stretch.velocityDegPerS[i], 3),
        formatNumber(stretch.torqueNm[i], 5),
        formatNumber(fit?.modelled, 5),
        formatNumber(fit?.residual, 5),
      ],
    };
  });
}
