import { angleNoisePct } from "#app/engine/fit/angle-noise.ts";
import type { Baseline } from "#app/engine/fit/cut-window.ts";
import { cutColumns } from "#app/engine/fit/cut-window.ts";
import { fitModel } from "#app/engine/fit/fit-model.ts";
import type { FitQuality } from "#app/engine/fit/quality.ts";
import { qualityOf } from "#app/engine/fit/quality.ts";
import { slipPct } from "#app/engine/fit/slip.ts";
import type {
  FittedModel,
  Impedance,
  ImpedanceModel,
  PreparedAxis,
  WindowColumns,
  WindowSpan,
} from "#app/engine/types.ts";

export interface WindowFit {
  status: "fitted";
  baseline: Baseline;
  columns: WindowColumns;
  fit: FittedModel;
  quality: FitQuality;
  /** null where it is not defined or I is not fitted. */
  angleNoisePct: number | null;
  slipPct: number | null;
}

/** One window from prepared columns to its estimates and their quality. */
export function fitWindow(
  prepared: PreparedAxis,
  span: WindowSpan,
  baseline: Baseline,
  rig: Impedance,
  model: ImpedanceModel,
  rateHz: number,
): WindowFit | { status: "too_short" } | { status: "singular" } {
  const columns = cutColumns(prepared, baseline, span.start, span.end, rig);
  const fit = fitModel(columns, model);
  if (fit.status !== "fitted") return fit;
  return {
    status: "fitted",
    baseline,
    columns,
    fit,
    quality: qualityOf(columns.torqueNm, fit.residualNm),
    angleNoisePct: model.free.includes("I")
      ? angleNoisePct(prepared, span.onset, columns, rateHz)
      : null,
    slipPct: slipPct(prepared.slipRad, span, columns.angleRad),
  };
}
