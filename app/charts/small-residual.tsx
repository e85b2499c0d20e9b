import { useMemo } from "react";
import { linePath } from "./path.ts";

const WIDTH = 120;
const HEIGHT = 40;

/** One window's residual on the scale that all small views share. */
export function SmallResidual({
  timeS,
  residualNm,
  reachNm,
}: {
  timeS: Float64Array;
  residualNm: Float64Array;
  /** Top and bottom of the shared scale, ± N·m. */
  reachNm: number;
}) {
  const path = useMemo(() => {
    const left = timeS[0] ?? 0;
    const right = timeS[timeS.length - 1] ?? 1;
    const range = { left, right: Math.max(right, left + 1e-9), low: -reachNm, high: reachNm };
    return linePath(timeS, residualNm, range, WIDTH, HEIGHT);
  }, [timeS, residualNm, reachNm]);
  return (
    <svg
      aria-hidden="true"
      className="block w-full"
      height={HEIGHT}
      preserveAspectRatio="none"
      viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
    >
      <path
        d={`M0 ${HEIGHT / 2}H${WIDTH}`}
        stroke="var(--rule)"
        vectorEffect="non-scaling-stroke"
      />
      <path
        d={path}
        fill="none"
        stroke="var(--ink)"
        strokeWidth="1.25"
        vectorEffect="non-scaling-stroke"
      />
    </svg>
  );
}
