import { extent } from "d3-array";
import { type ScaleLinear, scaleLinear } from "d3-scale";

/** Where the participants' figure draws what; no drawing here. */

export interface FigureCondition {
  id: string;
  name: string;
  isBaseline: boolean;
  isActive: boolean;
}

export interface FigureValue {
  /** In the figure's unit; null where the cell is missing. */
  value: number | null;
  /** Not approved, or not yet verified: drawn open. */
  provisional: boolean;
  /** "W03, tight: 5.07 N·m/rad, draft". */
  label: string;
}

export interface FigureParticipant {
  code: string;
  /** As many as conditions, in their order. */
  values: FigureValue[];
}

export interface FigureMean {
  mean: number | null;
  /** Null where fewer than two participants stand behind it. */
  interval: [number, number] | null;
  label: string;
}

export interface Place {
  x: number;
  condition: FigureCondition;
}

export interface Dot {
  x: number;
  y: number;
  provisional: boolean;
  label: string;
  /** Joined to a neighbour by a line. */
  joined: boolean;
}

export interface Segment {
  from: { x: number; y: number };
  to: { x: number; y: number };
  /** One of its ends is provisional. */
  provisional: boolean;
}

export interface ParticipantGeometry {
  places: Place[];
  y: ScaleLinear<number, number>;
  ticks: number[];
  /** x of the rules where passive ends and active begins (or the other way). */
  breaks: { x: number; left: "passive" | "active"; right: "passive" | "active" }[];
  participants: { code: string; segments: Segment[]; dots: Dot[] }[];
}

export const MARGIN = { left: 44, right: 4, top: 22, bottom: 40 } as const;
/** A point that no line joins stands beside the mean, not beneath it. */
const ASIDE_PX = 12;

export function participantGeometry(
  conditions: readonly FigureCondition[],
  participants: readonly FigureParticipant[],
  means: readonly FigureMean[],
  size: { width: number; height: number },
): ParticipantGeometry {
  const inner = Math.max(1, size.width - MARGIN.left - MARGIN.right);
  const step = inner / Math.max(1, conditions.length);
  const places = conditions.map((condition, i) => ({
    condition,
    x: MARGIN.left + (i + 0.5) * step,
  }));

  const all = [
    ...participants.flatMap((participant) => participant.values.map((v) => v.value)),
    ...means.flatMap((mean) => [mean.mean, ...(mean.interval ?? [])]),
  ].filter((value): value is number => value !== null && Number.isFinite(value));
  const [low = 0, high = 1] = extent(all);
  // Zero belongs to a stiffness: a difference looks as large as it is.
  const bottom = Math.min(0, low);
  const top = Math.max(0, high);
  const y = scaleLinear()
    .domain(bottom === top ? [0, 1] : [bottom, top])
    .range([size.height - MARGIN.bottom, MARGIN.top])
    .nice(5);

  return {
    places,
    y,
    ticks: y.ticks(5),
    breaks: breaksOf(places),
    participants: participants.map((participant) => drawParticipant(participant, places, y)),
  };
}

function kindOf(condition: FigureCondition): "passive" | "active" {
  return condition.isActive ? "active" : "passive";
}

function breaksOf(places: readonly Place[]): ParticipantGeometry["breaks"] {
  return places.flatMap((place, i) => {
    const before = places[i - 1];
    if (!before || before.condition.isActive === place.condition.isActive) return [];
    return [
      {
        x: (before.x + place.x) / 2,
        left: kindOf(before.condition),
        right: kindOf(place.condition),
      },
    ];
  });
}

/** Lines join neighbours alone: they break at a missing cell and where passive and active meet. */
function drawParticipant(
  participant: FigureParticipant,
  places: readonly Place[],
  y: ScaleLinear<number, number>,
): ParticipantGeometry["participants"][number] {
  const segments: Segment[] = [];
  const dots: Dot[] = [];
  const isJoined = (i: number, j: number) => {
    const [one, other] = [places[i], places[j]];
    const [a, b] = [participant.values[i]?.value ?? null, participant.values[j]?.value ?? null];
    return (
      one !== undefined &&
      other !== undefined &&
      a !== null &&
      b !== null &&
      one.condition.isActive === other.condition.isActive
    );
  };
  for (const [i, place] of places.entries()) {
    const here = participant.values[i];
    if (!here || here.value === null) continue;
    const joined = isJoined(i, i - 1) || isJoined(i, i + 1);
    dots.push({
      x: joined ? place.x : place.x - ASIDE_PX,
      y: y(here.value),
      provisional: here.provisional,
      label: here.label,
      joined,
    });
    const next = participant.values[i + 1];
    const nextPlace = places[i + 1];
    if (nextPlace && next && next.value !== null && isJoined(i, i + 1)) {
      segments.push({
        from: { x: place.x, y: y(here.value) },
        to: { x: nextPlace.x, y: y(next.value) },
        provisional: here.provisional || next.provisional,
      });
    }
  }
  return { code: participant.code, segments, dots };
}

/**
 * Fill of each condition's mean: hollow for the baseline, the slate ramp in order for the others,
 * spread so that the last is the darkest.
 */
export function conditionFills(conditions: readonly FigureCondition[]): string[] {
  const ordered = conditions.filter((condition) => !condition.isBaseline);
  return conditions.map((condition) => {
    if (condition.isBaseline) return "var(--sheet)";
    const place = ordered.indexOf(condition);
    const share = (place + 1) / ordered.length;
    const step =
      ordered.length < 5
        ? 1 + Math.round(4 * share)
        : 1 + Math.floor((4 * place) / Math.max(1, ordered.length - 1));
    return `var(--step-${Math.min(5, Math.max(1, step))})`;
  });
}

/** Width of a letter of a condition's name at 12 px, about. */
const LETTER_PX = 6.5;

/**
 * A condition's name as it fits below its place: one line or two, cut where even two do not hold it.
 *
 * @param width  px
 */
export function nameLines(name: string, width: number): string[] {
  const most = Math.max(3, Math.floor(width / LETTER_PX));
  const cut = (text: string) => (text.length > most ? `${text.slice(0, most - 1)}…` : text);
  if (name.length <= most) return [name];
  const at = name.lastIndexOf(" ", most);
  return at <= 0 ? [cut(name)] : [name.slice(0, at), cut(name.slice(at + 1))];
}
