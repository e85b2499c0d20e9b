import uPlot from "uplot";
import type { ChartColours } from "./colours.ts";
import { spread, threeTicks, tickLabels } from "./ticks.ts";

/** A stretch of a line with a time axis of its own. */
export interface LinePiece {
  timeS: Float64Array;
  values: Float64Array;
}

/** What one pane of a stack shows. */
export interface PaneScene {
  /** The measured line over the stack's time; null where there is none. */
  line: Float64Array | null;
  /** What the model says, beneath the measured line. */
  model: readonly LinePiece[];
  /** Single values, a dot for each sample. */
  dots: readonly LinePiece[];
}

/** What all panes share. */
export interface TimeScene {
  fromS: number;
  toS: number;
  timeS: Float64Array;
  /** Windows besides the chosen one, shaded or, set aside, hatched. */
  bands: readonly { fromS: number; toS: number; aside: boolean }[];
  /** A drag is under way: ranges grow where they must and never shrink, so that nothing jumps. */
  steady: boolean;
}

const MEASURED_PX = 1.25;
const MODEL_PX = 4;
const MODEL_STRENGTH = 0.75;
const DOT_RADIUS_PX = 1.7;
/** Dots nearer than this run together: a line shows more. */
const CLOSEST_DOTS_PX = 1.5;
const EDGE_LABEL_PX = 8;
const ZERO: [number, number] = [0, 0];

/** One canvas of a stack of traces. The gutter for tick labels is at its left. */
export class TracePane {
  readonly #plot: uPlot;
  readonly #symmetric: boolean;
  #colours: ChartColours;
  #scene: PaneScene = { line: null, model: [], dots: [] };
  #x: [number, number] = [0, 1];
  #y: [number, number] = [-1, 1];
  #ticks: number[] = [-1, 0, 1];
  #drawnLine: Float64Array | null = null;
  #bands: TimeScene["bands"] = [];

  constructor(
    host: HTMLElement,
    options: { gutterPx: number; symmetric: boolean; colours: ChartColours },
  ) {
    this.#colours = options.colours;
    this.#symmetric = options.symmetric;
    this.#plot = new uPlot(this.#options(host, options.gutterPx), [[], []], host);
  }

  /** Draws within this turn of the event loop. */
  draw(time: TimeScene, scene: PaneScene): void {
    this.#scene = scene;
    this.#bands = time.bands;
    const range = this.#rangeOf(scene, time.steady);
    const sameX = this.#x[0] === time.fromS && this.#x[1] === time.toS;
    const sameY = this.#y[0] === range.low && this.#y[1] === range.high;
    const line = scene.line ?? NO_SAMPLES;
    this.#x = [time.fromS, time.toS];
    this.#y = [range.low, range.high];
    this.#ticks = range.ticks;
    if (sameX && sameY && line === this.#drawnLine) {
      this.#plot.redraw(false, false);
      return;
    }
    this.#plot.batch(() => {
      if (line !== this.#drawnLine) {
        this.#plot.setData([line.length > 0 ? time.timeS : NO_SAMPLES, line], false);
      }
      this.#plot.setScale("x", { min: time.fromS, max: time.toS });
      this.#plot.setScale("y", { min: range.low, max: range.high });
    });
    this.#drawnLine = line;
  }

  resize(width: number, height: number): void {
    if (width > 0 && height > 0) this.#plot.setSize({ width, height });
  }

  recolour(colours: ChartColours): void {
    this.#colours = colours;
    this.#plot.redraw(false, true);
  }

  destroy(): void {
    this.#plot.destroy();
  }

  #rangeOf(scene: PaneScene, steady: boolean) {
    const columns = [...scene.model, ...scene.dots].map((piece) => piece.values);
    if (scene.line !== null) columns.push(scene.line);
    let [low, high] = spread(columns) ?? ZERO;
    if (this.#symmetric) {
      const reach = Math.max(Math.abs(low), Math.abs(high));
      [low, high] = [-reach, reach];
    }
    if (steady) {
      if (low >= this.#y[0] && high <= this.#y[1]) {
        return { low: this.#y[0], high: this.#y[1], ticks: this.#ticks };
      }
      low = Math.min(low, this.#y[0]);
      high = Math.max(high, this.#y[1]);
    }
    const range = threeTicks(low, high);
    // Room for half a label where a tick stands at the very edge.
    const edge = (range.high - range.low) * Math.min(0.2, EDGE_LABEL_PX / this.#plot.height);
    const [first, , last] = range.ticks as [number, number, number];
    return {
      low: Math.min(range.low, first - edge),
      high: Math.max(range.high, last + edge),
      ticks: range.ticks,
    };
  }

  #options(host: HTMLElement, gutterPx: number): uPlot.Options {
    const { width, height } = host.getBoundingClientRect();
    return {
      width: Math.max(1, width),
      height: Math.max(1, height),
      padding: [1, 1, 1, 0],
      legend: { show: false },
      cursor: { show: false },
      select: { show: false, left: 0, top: 0, width: 0, height: 0 },
      scales: {
        x: { time: false, auto: false, range: () => this.#x },
        y: { auto: false, range: () => this.#y },
      },
      axes: [
        { show: false },
        {
          size: gutterPx,
          gap: 8,
          font: `12px ${this.#colours.figures}`,
          stroke: () => this.#colours.quietInk,
          splits: () => this.#ticks,
          values: (_, ticks) => tickLabels(ticks),
          grid: { stroke: () => this.#colours.rule, width: 1, dash: [2, 3] },
          ticks: { show: false },
        },
      ],
      series: [
        {},
        {
          stroke: () => this.#colours.ink,
          width: MEASURED_PX,
          points: { show: false },
          paths: (plot) => measuredPath(plot),
        },
      ],
      hooks: {
        drawClear: [(plot) => this.#drawBands(plot)],
        drawAxes: [
          (plot) => {
            this.#drawZero(plot);
            this.#drawModel(plot);
          },
        ],
        draw: [(plot) => this.#drawDots(plot)],
      },
    };
  }

  #drawBands(plot: uPlot): void {
    if (this.#bands.length === 0) return;
    this.#inside(plot, (ctx) => {
      const { left, top, width, height } = plot.bbox;
      const scale = width / (this.#x[1] - this.#x[0]);
      for (const { fromS, toS, aside } of this.#bands) {
        const x = left + (fromS - this.#x[0]) * scale;
        const wide = Math.max((toS - fromS) * scale, 2 * devicePixelRatio);
        if (x + wide < left || x > left + width) continue;
        if (aside) hatch(ctx, { x, y: top, wide, high: height }, this.#colours.aside);
        else {
          ctx.fillStyle = this.#colours.hover;
          ctx.fillRect(x, top, wide, height);
        }
      }
    });
  }

  #drawZero(plot: uPlot): void {
    if (this.#y[0] > 0 || this.#y[1] < 0) return;
    const { ctx, bbox } = plot;
    const y = Math.round(plot.valToPos(0, "y", true)) + 0.5;
    ctx.save();
    ctx.strokeStyle = this.#colours.rule;
    ctx.lineWidth = devicePixelRatio;
    ctx.setLineDash([]);
    ctx.beginPath();
    ctx.moveTo(bbox.left, y);
    ctx.lineTo(bbox.left + bbox.width, y);
    ctx.stroke();
    ctx.restore();
  }

  #drawModel(plot: uPlot): void {
    if (this.#scene.model.length === 0) return;
    this.#inside(plot, (ctx) => {
      ctx.strokeStyle = this.#colours.model;
      ctx.globalAlpha = MODEL_STRENGTH;
      ctx.lineWidth = MODEL_PX * devicePixelRatio;
      ctx.lineJoin = "round";
      ctx.stroke(this.#pathOf(plot, this.#scene.model));
    });
  }

  #drawDots(plot: uPlot): void {
    if (this.#scene.dots.length === 0) return;
    this.#inside(plot, (ctx) => {
      const sparse: LinePiece[] = [];
      const dense: LinePiece[] = [];
      for (const piece of this.#scene.dots) {
        (spacingPx(plot, piece) < CLOSEST_DOTS_PX ? dense : sparse).push(piece);
      }
      ctx.strokeStyle = this.#colours.ink;
      ctx.fillStyle = this.#colours.ink;
      ctx.lineWidth = MEASURED_PX * devicePixelRatio;
      ctx.stroke(this.#pathOf(plot, dense));
      const radius = DOT_RADIUS_PX * devicePixelRatio;
      ctx.beginPath();
      for (const { timeS, values } of sparse) {
        for (let i = 0; i < timeS.length; i++) {
          const x = plot.valToPos(timeS[i] as number, "x", true);
          const y = plot.valToPos(values[i] as number, "y", true);
          ctx.moveTo(x + radius, y);
          ctx.arc(x, y, radius, 0, 2 * Math.PI);
        }
      }
      ctx.fill();
    });
  }

  #pathOf(plot: uPlot, pieces: readonly LinePiece[]): Path2D {
    const path = new Path2D();
    for (const { timeS, values } of pieces) addLine(plot, path, timeS, values);
    return path;
  }

  #inside(plot: uPlot, paint: (ctx: CanvasRenderingContext2D) => void): void {
    const { ctx, bbox } = plot;
    ctx.save();
    ctx.beginPath();
    ctx.rect(bbox.left, bbox.top, bbox.width, bbox.height);
    ctx.clip();
    ctx.setLineDash([]);
    paint(ctx);
    ctx.restore();
  }
}

const HATCH_PX = 6;

/** Thin slanted lines: set aside. */
function hatch(
  ctx: CanvasRenderingContext2D,
  box: { x: number; y: number; wide: number; high: number },
  colour: string,
): void {
  ctx.save();
  ctx.beginPath();
  ctx.rect(box.x, box.y, box.wide, box.high);
  ctx.clip();
  ctx.strokeStyle = colour;
  ctx.globalAlpha = 0.6;
  ctx.lineWidth = devicePixelRatio;
  ctx.beginPath();
  for (let x = box.x - box.high; x < box.x + box.wide; x += HATCH_PX * devicePixelRatio) {
    ctx.moveTo(x, box.y + box.high);
    ctx.lineTo(x + box.high, box.y);
  }
  ctx.stroke();
  ctx.restore();
}

const NO_SAMPLES = new Float64Array(0);

/** The measured line as one path; uPlot's own builders would join the line across missing samples. */
function measuredPath(plot: uPlot): uPlot.Series.Paths {
  const stroke = new Path2D();
  addLine(plot, stroke, plot.data[0] as Float64Array, plot.data[1] as Float64Array);
  return { stroke, fill: null, clip: null, flags: 1 };
}

function addLine(plot: uPlot, path: Path2D, timeS: Float64Array, values: Float64Array): void {
  const { left, top, width, height } = plot.bbox;
  const { min: x0 = 0, max: x1 = 1 } = plot.scales.x ?? {};
  const { min: y0 = 0, max: y1 = 1 } = plot.scales.y ?? {};
  const xScale = width / (x1 - x0);
  const yScale = height / (y1 - y0);
  let pen = false;
  for (let i = 0; i < timeS.length; i++) {
    const value = values[i] as number;
    if (Number.isNaN(value)) {
      pen = false;
      continue;
    }
    const x = left + ((timeS[i] as number) - x0) * xScale;
    const y = top + height - (value - y0) * yScale;
    if (pen) path.lineTo(x, y);
    else path.moveTo(x, y);
    pen = true;
  }
}

function spacingPx(plot: uPlot, { timeS }: LinePiece): number {
  if (timeS.length < 2) return Number.POSITIVE_INFINITY;
  const first = plot.valToPos(timeS[0] as number, "x");
  const last = plot.valToPos(timeS[timeS.length - 1] as number, "x");
  return (last - first) / (timeS.length - 1);
}
