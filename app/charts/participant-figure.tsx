import {
  conditionFills,
  type FigureCondition,
  type FigureMean,
  type FigureParticipant,
  MARGIN,
  nameLines,
  participantGeometry,
} from "./participant-geometry.ts";
import { useWidth } from "./use-width.ts";

/**
 * Participants as thin joined lines, the mean over participants with its interval above them. The
 * same numbers stand in the table beside it, so that the drawing is one picture to a screen reader.
 */
export function ParticipantFigure({
  title,
  conditions,
  participants,
  means,
  height = 288,
}: {
  /** Says what is drawn, for those who do not see it. */
  title: string;
  conditions: readonly FigureCondition[];
  participants: readonly FigureParticipant[];
  means: readonly FigureMean[];
  height?: number;
}) {
  const [place, width] = useWidth<HTMLDivElement>(560);
  const {
    places,
    y,
    ticks,
    breaks,
    participants: lines,
  } = participantGeometry(conditions, participants, means, { width, height });
  const fills = conditionFills(conditions);
  const tickText = y.tickFormat(5);
  const bottom = height - MARGIN.bottom;

  return (
    <div ref={place}>
      <svg
        aria-label={title}
        className="block h-auto max-w-full"
        height={height}
        role="img"
        viewBox={`0 0 ${width} ${height}`}
        width={width}
      >
        {ticks.map((tick) => (
          <g key={tick}>
            <path
              d={`M${MARGIN.left} ${y(tick)}H${width - MARGIN.right}`}
              stroke={tick === 0 ? "var(--edge)" : "var(--rule)"}
            />
            <text
              fill="var(--ink-2)"
              fontFamily="var(--figures)"
              fontSize="12"
              textAnchor="end"
              x={MARGIN.left - 8}
              y={y(tick) + 4}
            >
              {tickText(tick)}
            </text>
          </g>
        ))}
        {breaks.map((at) => (
          <g fill="var(--ink-2)" fontSize="12" key={at.x}>
            <path d={`M${at.x} ${MARGIN.top}V${bottom}`} stroke="var(--edge)" />
            <text textAnchor="end" x={at.x - 8} y={MARGIN.top - 8}>
              {at.left}
            </text>
            <text x={at.x + 8} y={MARGIN.top - 8}>
              {at.right}
            </text>
          </g>
        ))}
        {lines.map((line) => (
          <g key={line.code} stroke="var(--aside)">
            {line.segments.map((segment) => (
              <path
                d={`M${segment.from.x} ${segment.from.y}L${segment.to.x} ${segment.to.y}`}
                key={segment.from.x}
                strokeDasharray={segment.provisional ? "3 3" : undefined}
              />
            ))}
            {line.dots.map((dot) => (
              <circle
                cx={dot.x}
                cy={dot.y}
                fill={dot.provisional ? "var(--paper)" : "var(--aside)"}
                key={dot.x}
                r={dot.joined ? 1.75 : 2.25}
              >
                <title>{dot.label}</title>
              </circle>
            ))}
          </g>
        ))}
        {places.map(({ condition, x }, i) => {
          const mean = means[i];
          return (
            <g key={condition.id}>
              {mean?.interval ? (
                <path
                  d={`M${x} ${y(mean.interval[0])}V${y(mean.interval[1])}`}
                  stroke="var(--ink)"
                  strokeWidth="2"
                />
              ) : null}
              {mean && mean.mean !== null ? (
                <circle
                  cx={x}
                  cy={y(mean.mean)}
                  fill={fills[i]}
                  r="6"
                  stroke="var(--ink)"
                  strokeWidth="1.5"
                >
                  <title>{mean.label}</title>
                </circle>
              ) : null}
              <ConditionName
                name={condition.name}
                width={(width - MARGIN.left) / places.length}
                x={x}
                y={bottom + 18}
              />
            </g>
          );
        })}
      </svg>
    </div>
  );
}

/** Whole in its title where it is cut. */
function ConditionName({
  name,
  width,
  x,
  y,
}: {
  name: string;
  width: number;
  x: number;
  y: number;
}) {
  const lines = nameLines(name, width);
  return (
    <text fill="var(--ink)" fontSize="12" textAnchor="middle" x={x} y={y}>
      {lines.map((line, place) => (
        <tspan dy={place === 0 ? 0 : 14} key={line} x={x}>
          {line}
        </tspan>
      ))}
      {lines.join(" ") === name ? null : <title>{name}</title>}
    </text>
  );
}
