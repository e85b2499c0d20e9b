/** Where a plot's values lie: both ends of both axes. */
export interface PlotRange {
  left: number;
  right: number;
  low: number;
  high: number;
}

/** An SVG path through (x, y) in a box; the line breaks where a value is missing. */
export function linePath(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  range: PlotRange,
  width: number,
  height: number,
): string {
  let path = "";
  let pen = false;
  eachPoint(x, y, range, width, height, (px, py) => {
    if (px === null || py === null) {
      pen = false;
      return;
    }
    path += `${pen ? "L" : "M"}${px.toFixed(1)} ${py.toFixed(1)}`;
    pen = true;
  });
  return path;
}

/** An SVG path of points: strokes of no length, which round ends make into dots. */
export function dotsPath(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  range: PlotRange,
  width: number,
  height: number,
): string {
  let path = "";
  eachPoint(x, y, range, width, height, (px, py) => {
    if (px !== null && py !== null) path += `M${px.toFixed(1)} ${py.toFixed(1)}h0`;
  });
  return path;
}

function eachPoint(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  { left, right, low, high }: PlotRange,
  width: number,
  height: number,
  visit: (px: number | null, py: number | null) => void,
): void {
  const xScale = width / (right - left);
  const yScale = height / (high - low);
  for (let i = 0; i < x.length; i++) {
    const value = y[i] as number;
    if (Number.isFinite(value)) {
      visit(((x[i] as number) - left) * xScale, height - (value - low) * yScale);
    } else visit(null, null);
  }
}
