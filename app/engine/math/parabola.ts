/**
 * Vertex of the parabola through three equally spaced points.
 *
 * @param before, middle, after  values at −1, 0 and 1
 * @returns its place in steps from the middle one and its value; null where the three lie on a line
 */
export function parabolaVertex(
  before: number,
  middle: number,
  after: number,
): { offset: number; value: number } | null {
  const curvature = before - middle + (after - middle);
  if (curvature === 0) return null;
  const offset = (before - after) / (2 * curvature);
  return { offset, value: middle - ((before - after) * offset) / 4 };
}
