import { useMemo } from "react";
import { TERMS } from "#app/engine/types.ts";
import { linePath } from "./path.ts";
import { PlotFrame } from "./plot-frame.tsx";
import { roundTicks, spread, threeTicks } from "./ticks.ts";

/** Each term's line, as everywhere: K solid, B dashed, I dotted. */
const DASHES = { K: undefined, B: "6 3", I: "1.5 3" } as const;

/** One window's torque from its baseline: measured over modelled, and the parts of the model. */
export function TorquePlot({
  timeMs,
  measuredNm,
  modelledNm,
  termsNm,
  height = 240,
}: {
  timeMs: Float64Array;
  measuredNm: Float64Array;
  modelledNm: Float64Array;
  termsNm: { K: Float64Array; B: Float64Array; I: Float64Array };
  height?: number;
}) {
  const y = useMemo(() => {
    const [low, high] = spread([measuredNm, modelledNm, termsNm.K, termsNm.B, termsNm.I]) ?? [0, 1];
    return threeTicks(low, high);
  }, [measuredNm, modelledNm, termsNm]);
  const low = timeMs[0] ?? 0;
  const high = Math.max(timeMs[timeMs.length - 1] ?? 1, low + 1e-6);
  return (
    <div>
      <PlotFrame
        before={700}
        height={height}
        label="Measured and modelled torque of this window, with the parts that stiffness, damping and inertia have in it"
        x={{ title: "ms after onset", low, high, ticks: roundTicks(low, high) }}
        y={{ title: "N·m", ...y }}
      >
        {({ range, width, height: high }) => {
          const path = (values: Float64Array) => linePath(timeMs, values, range, width, high);
          return (
            <>
              <path
                d={path(modelledNm)}
                fill="none"
                opacity="0.75"
                stroke="var(--model)"
                strokeLinejoin="round"
                strokeWidth="4"
              />
              {TERMS.map((term) => (
                <path
                  d={path(termsNm[term])}
                  fill="none"
                  key={term}
                  stroke={`var(--${term})`}
                  strokeDasharray={DASHES[term]}
                  strokeLinecap={term === "I" ? "round" : undefined}
                  strokeWidth={term === "I" ? 2 : 1.5}
                />
              ))}
              <path d={path(measuredNm)} fill="none" stroke="var(--ink)" strokeWidth="1.25" />
            </>
          );
        }}
      </PlotFrame>
      <ul className="flex flex-wrap gap-x-4 text-sm text-ink-2 sm:pl-[52px]">
        <Legend stroke="var(--ink)" text="measured" width={1.25} />
        <Legend stroke="var(--model)" text="modelled" width={4} />
        {TERMS.map((term) => (
          <Legend
            dash={DASHES[term]}
            key={term}
            stroke={`var(--${term})`}
            text={`part of ${term}`}
            width={term === "I" ? 2 : 1.5}
          />
        ))}
      </ul>
    </div>
  );
}

function Legend({
  stroke,
  width,
  dash,
  text,
}: {
  stroke: string;
  width: number;
  dash?: string | undefined;
  text: string;
}) {
  return (
    <li className="flex items-center gap-1.5">
      <svg aria-hidden="true" height="8" width="22">
        <path d="M0 4H22" stroke={stroke} strokeDasharray={dash} strokeWidth={width} />
      </svg>
      {text}
    </li>
  );
}
