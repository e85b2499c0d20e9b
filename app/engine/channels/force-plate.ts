export type Vector = readonly [number, number, number];
type Columns = readonly [Float64Array, Float64Array, Float64Array];

const AXES = { x: 0, y: 1, z: 2 } as const;

/**
 * Moment about the joint's centre from what a force plate measures: M_joint = M_plate + r × F.
 *
 * A pure force through the joint's centre gives 0. Inverse dynamics in its plainest form: the
 * plate's own weight and inertia are still in it.
 *
 * @param forceN  F as the plate applies it to the foot, three columns, N
 * @param momentNm  M_plate about the plate's origin, three columns, N·m
 * @param jointToPlateM  r, from the joint's centre to the plate's origin, m
 * @param about  which component is wanted
 * @returns N·m; NaN where a component that enters is missing
 */
export function momentAboutJoint(
  forceN: Columns,
  momentNm: Columns,
  jointToPlateM: Vector,
  about: "x" | "y" | "z",
): Float64Array {
  const i = AXES[about];
  const j = (i + 1) % 3;
  const k = (i + 2) % 3;
  const rj = jointToPlateM[j] as number;
  const rk = jointToPlateM[k] as number;
  const forceJ = forceN[j] as Float64Array;
  const forceK = forceN[k] as Float64Array;
  // (r × F)_i = r_j F_k − r_k F_j for i, j, k in cyclic order.
  return (momentNm[i] as Float64Array).map(
    (moment, n) => moment + rj * (forceK[n] as number) - rk * (forceJ[n] as number),
  );
}
