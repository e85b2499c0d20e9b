import { fitModel } from "#app/engine/fit/fit-model.ts";
import type { Analysed } from "#app/engine/pipeline-pool.ts";
import { windowSpread } from "#app/engine/pool/interval.ts";
import { stackColumns } from "#app/engine/pool/stack.ts";
import type { Protocol, ResultRig, Term } from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

/** The rig's own K, B, I of one axis, and whether empty recordings gave them. */
export interface AxisRig {
  rig: ResultRig;
  measured: boolean;
}

/** Empty recordings are fitted with all three terms, unbounded, against the rig's own angle. */
export function rigProtocol(protocol: Protocol): Protocol {
  return {
    ...protocol,
    axes: protocol.axes.map((axis) => ({ ...axis, fit_angle: "rig" })),
    model: { terms: [...TERMS], fixed: {}, nonnegative: false },
    rig: { K: 0, B: 0, I: 0 },
  };
}

/**
 * The rig's K, B, I from the windows of its empty recordings, both directions stacked, with the SD
 * of the window estimates over √n.
 *
 * @returns null where no window was fitted
 */
export function fitRig(windows: readonly Analysed[]): ResultRig | null {
  const poolings = windows.flatMap(({ pooling }) => pooling ?? []);
  const stack = stackColumns(poolings.map(({ placed }) => placed.columns));
  const fit = fitModel(stack, { free: [...TERMS], fixed: {}, nonnegative: false });
  if (poolings.length === 0 || fit.status !== "fitted") return null;
  const error = (term: Term) => {
    const spread = windowSpread(
      poolings.map((pooling) => pooling.fit.parameters[term] as number),
      0.95,
    );
    return spread?.sd == null ? null : spread.sd / Math.sqrt(poolings.length);
  };
  const { K, B, I } = fit.parameters;
  return {
    K: K as number,
    B: B as number,
    I: I as number,
    K_sd: error("K"),
    B_sd: error("B"),
    I_sd: error("I"),
  };
}
