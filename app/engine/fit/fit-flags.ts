import type { FlagCode } from "#app/engine/errors.ts";
import type {
  FilterProtocol,
  FittedModel,
  ImpedanceModel,
  Segment,
  Term,
  WindowSpan,
} from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

const LEAST_VAF_PCT = 90;
const WEAK_CONDITION = 30;
const ILL_CONDITION = 100;
/** Samples that one period of the cut-off should have. */
const SAMPLES_PER_PERIOD = 20;
/** A measured rate is off by some 1e-9: 50 Hz at 999.9999999 Hz has its 20 samples. */
const ROUNDING = 1e-6;

/** What one fit's own numbers say, of a window or pooled. */
export function fitFlags(
  fit: FittedModel,
  model: ImpedanceModel,
  vafPct: number | null,
): FlagCode[] {
  const codes: FlagCode[] = [];
  if (vafPct !== null && vafPct < LEAST_VAF_PCT) codes.push("low_vaf");
  if (model.free.some((term) => (fit.parameters[term] ?? 0) < 0)) codes.push("non_physical_sign");
  if (fit.conditionNumber > ILL_CONDITION) codes.push("ill_conditioned");
  else if (fit.conditionNumber > WEAK_CONDITION) codes.push("weakly_conditioned");
  if (fit.bound.length > 0) codes.push("bound_active");
  return [...codes, ...modelFlags(model)];
}

/** What the model itself leaves out of an estimate. */
export function modelFlags(model: ImpedanceModel): FlagCode[] {
  const isFixed = (term: Term) => model.fixed[term] !== undefined;
  const codes: FlagCode[] = [];
  if (TERMS.some(isFixed)) codes.push("fixed");
  if (TERMS.some((term) => !model.free.includes(term) && !isFixed(term))) codes.push("term_absent");
  return codes;
}

/** Fewer than 20 samples in one period of the cut-off. */
export function isCoarse(filter: FilterProtocol | null, rateHz: number): boolean {
  return filter !== null && rateHz / filter.cutoff_hz < SAMPLES_PER_PERIOD - ROUNDING;
}

/**
 * Whether a window can hold reflex torque: the zero-phase filter carries about 1 % of a later torque
 * back by 750 / cut-off − 5 ms.
 */
export function isPastReflexLimit(
  windowEndMs: number,
  filter: FilterProtocol | null,
  reflexLimitMs: number,
): boolean {
  const reachMs = filter === null ? 0 : Math.max(0, 750 / filter.cutoff_hz - 5);
  return windowEndMs + reachMs > reflexLimitMs;
}

/** Whether the span comes within one period of the cut-off to an end of its segment, where the filter's ends show. */
export function isNearEdge(
  span: WindowSpan,
  segments: readonly Segment[],
  filter: FilterProtocol | null,
  rateHz: number,
): boolean {
  if (filter === null) return false;
  const period = rateHz / filter.cutoff_hz - ROUNDING;
  const segment = segments.find(({ start, end }) => start <= span.spanStart && span.spanEnd < end);
  if (segment === undefined) return false;
  return span.spanStart - segment.start < period || segment.end - 1 - span.spanEnd < period;
}
