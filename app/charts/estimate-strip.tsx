import type { Term } from "#app/engine/types.ts";
import { useWidth } from "./use-width.ts";

const HEIGHT = 26;
const ROOM = 6;

/** Every window's value of one term as a mark, with their mean and its interval below them. */
export function EstimateStrip({
  term,
  values,
  mean,
  interval,
  label,
}: {
  term: Term;
  values: readonly number[];
  mean: number | null;
  interval: readonly [number, number] | null;
  label: string;
}) {
  const [box, width] = useWidth<HTMLDivElement>(240);
  const all = [...values, ...(interval ?? [])];
  const low = Math.min(...all);
  const high = Math.max(...all);
  const xOf = (value: number) =>
    high > low ? ROOM + ((value - low) / (high - low)) * (width - 2 * ROOM) : width / 2;
  if (values.length === 0) return null;
  return (
    <div className="min-w-0" ref={box}>
      <svg aria-label={label} className="block" height={HEIGHT} role="img" width={width}>
        <title>{label}</title>
        <path d={`M0 19.5H${width}`} stroke="var(--rule)" />
        {values.map((value, i) => (
          <circle
            cx={xOf(value)}
            cy="7"
            fill="none"
            // biome-ignore lint/suspicious/noArrayIndexKey: windows keep their order; values may repeat.
            key={i}
            r="3"
            stroke={`var(--${term})`}
            strokeWidth="1.25"
          />
        ))}
        {interval ? (
          <path
            d={`M${xOf(interval[0])} 19.5H${xOf(interval[1])}M${xOf(interval[0])} 16V23M${xOf(interval[1])} 16V23`}
            stroke="var(--ink)"
            strokeWidth="1.5"
          />
        ) : null}
        {mean === null ? null : <circle cx={xOf(mean)} cy="19.5" fill="var(--ink)" r="3.5" />}
      </svg>
    </div>
  );
}
