/** Which stretch of a recording the traces show. */

export interface TimeRange {
  fromS: number;
  toS: number;
}

/** Near a window the view goes along with the chosen one; further out it stays where it is. */
export type View =
  | { kind: "near"; beforeS: number; afterS: number }
  | { kind: "fixed"; fromS: number; toS: number };

/** Above this the view is of the recording, not of one window. */
const NEAR_MOST_S = 3;
const LEAST_SPAN_S = 0.02;
/** What a window's view shows at least, s from the onset. */
const USUAL_BEFORE_S = 0.12;
const USUAL_AFTER_S = 0.22;

/** A view of one window: −120 to 220 ms, wider where baseline or window need it. */
export function windowView(
  baselineMs: readonly [number, number],
  windowMs: readonly [number, number],
): View {
  const roomS = 0.02;
  return {
    kind: "near",
    beforeS: Math.max(USUAL_BEFORE_S, -Math.min(baselineMs[0], windowMs[0]) / 1000 + roomS),
    afterS: Math.max(USUAL_AFTER_S, windowMs[1] / 1000 + roomS),
  };
}

/** @param onsetS  of the chosen window; null where there is none */
export function rangeOf(view: View, onsetS: number | null, whole: TimeRange): TimeRange {
  if (view.kind === "fixed") return { fromS: view.fromS, toS: view.toS };
  if (onsetS === null) return whole;
  return { fromS: onsetS - view.beforeS, toS: onsetS + view.afterS };
}

/** Widens (factor over 1) or narrows a view about a time; never wider than the recording. */
export function zoomed(
  view: View,
  onsetS: number | null,
  whole: TimeRange,
  factor: number,
  aboutS: number,
): View {
  const { fromS, toS } = rangeOf(view, onsetS, whole);
  const wholeS = whole.toS - whole.fromS;
  const spanS = Math.min(wholeS, Math.max(LEAST_SPAN_S, (toS - fromS) * factor));
  const scale = spanS / (toS - fromS);
  return asView(within(aboutS - (aboutS - fromS) * scale, spanS, whole), onsetS);
}

export function panned(view: View, onsetS: number | null, whole: TimeRange, byS: number): View {
  const { fromS, toS } = rangeOf(view, onsetS, whole);
  return asView(within(fromS + byS, toS - fromS, whole), onsetS);
}

/** Brings a time into a view that does not go along by itself. */
export function showing(view: View, atS: number, whole: TimeRange): View {
  if (view.kind === "near" || (atS >= view.fromS && atS <= view.toS)) return view;
  const spanS = view.toS - view.fromS;
  return { kind: "fixed", ...within(atS - spanS / 2, spanS, whole) };
}

/** A range of this length that does not leave the recording, as far as it fits. */
function within(fromS: number, spanS: number, whole: TimeRange): TimeRange {
  const latest = Math.max(whole.fromS, whole.toS - spanS);
  const start = Math.min(latest, Math.max(whole.fromS, fromS));
  return { fromS: start, toS: start + spanS };
}

function asView(range: TimeRange, onsetS: number | null): View {
  if (onsetS !== null && range.toS - range.fromS <= NEAR_MOST_S) {
    return { kind: "near", beforeS: onsetS - range.fromS, afterS: range.toS - onsetS };
  }
  return { kind: "fixed", ...range };
}
