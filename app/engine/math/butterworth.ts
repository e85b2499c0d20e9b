/** One second-order section, H(z) = (b0 + b1 z⁻¹ + b2 z⁻²) / (1 + a1 z⁻¹ + a2 z⁻²). */
export interface Section {
  b0: number;
  b1: number;
  b2: number;
  a1: number;
  a2: number;
}

/**
 * Butterworth low-pass as second-order sections by the bilinear transform with pre-warping, so that
 * `cutoffHz` is the −3 dB point of one pass. The analogue prototype is the product of
 * 1 / (s² + 2 sin((2k − 1)π / 2n) s + 1), with one 1 / (s + 1) where the order n is odd
 * (Butterworth 1930; Oppenheim & Schafer 2010, section 7.2).
 *
 * @param order  n of one pass, 1 or more
 * @throws RangeError where the order is not a whole number ≥ 1 or the cut-off not within 0 … rate / 2
 */
export function butterworthLowpass(order: number, cutoffHz: number, rateHz: number): Section[] {
  checkOrder(order);
  checkFrequency(cutoffHz, rateHz);
  const w = Math.tan((Math.PI * cutoffHz) / rateHz);
  const sections: Section[] = [];
  if (order % 2 === 1) {
    const b = w / (1 + w);
    sections.push({ b0: b, b1: b, b2: 0, a1: (w - 1) / (w + 1), a2: 0 });
  }
  for (let k = Math.floor(order / 2); k >= 1; k--) {
    const q = 2 * Math.sin(((2 * k - 1) * Math.PI) / (2 * order));
    const norm = 1 + q * w + w * w;
    const a1 = (2 * (w - 1) * (w + 1)) / norm;
    const a2 = (1 - q * w + w * w) / norm;
    // w² / norm, but with the gain at 0 Hz exactly 1 for a1 and a2 as they are rounded: where the
    // cut-off is far below the rate, 1 + a1 + a2 is small and this keeps one more digit.
    const b = (1 + a1 + a2) / 4;
    sections.push({ b0: b, b1: 2 * b, b2: b, a1, a2 });
  }
  return sections;
}

/**
 * Butterworth band-pass as second-order sections, both edges pre-warped; `order` is the prototype's,
 * the filter has `order` sections and 2 · order poles. Gain 1 at the geometric middle of the warped
 * edges.
 *
 * @throws RangeError where the order is not a whole number ≥ 1 or not 0 < low < high < rate / 2
 */
export function butterworthBandpass(
  order: number,
  lowHz: number,
  highHz: number,
  rateHz: number,
): Section[] {
  checkOrder(order);
  checkFrequency(lowHz, rateHz);
  checkFrequency(highHz, rateHz);
  if (lowHz >= highHz) {
    throw new RangeError(`band-pass from ${lowHz} to ${highHz} Hz: the edges must increase`);
  }
  const low = Math.tan((Math.PI * lowHz) / rateHz);
  const high = Math.tan((Math.PI * highHz) / rateHz);
  const width = high - low;
  const middleSquared = low * high;
  const middleRad = 2 * Math.atan(Math.sqrt(middleSquared));
  const sections: Section[] = [];
  // Each prototype pole p becomes the two roots of s² − p · width · s + middle² = 0. Poles with
  // Im p > 0 stand for their conjugates too, so each of their two roots makes one section.
  for (let k = 1; k <= Math.floor(order / 2); k++) {
    const angle = ((2 * k - 1) * Math.PI) / (2 * order);
    const halfRe = (-Math.sin(angle) * width) / 2;
    const halfIm = (Math.cos(angle) * width) / 2;
    const root = complexSqrt(
      halfRe * halfRe - halfIm * halfIm - middleSquared,
      2 * halfRe * halfIm,
    );
    for (const sign of [1, -1]) {
      const re = halfRe + sign * root.re;
      const im = halfIm + sign * root.im;
      sections.push(bandSection(-2 * re, re * re + im * im, middleRad));
    }
  }
  // The real pole p = −1 of an odd order makes one section of both its roots.
  if (order % 2 === 1) sections.push(bandSection(width, middleSquared, middleRad));
  return sections;
}

/** Bilinear image of s / (s² + c1 s + c0) with gain 1 at `middleRad` (radians per sample). */
function bandSection(c1: number, c0: number, middleRad: number): Section {
  const norm = 1 + c1 + c0;
  const a1 = (2 * (c0 - 1)) / norm;
  const a2 = (1 - c1 + c0) / norm;
  // |1 − z⁻²| = 2 |sin w| on the unit circle.
  const re = 1 + a1 * Math.cos(middleRad) + a2 * Math.cos(2 * middleRad);
  const im = a1 * Math.sin(middleRad) + a2 * Math.sin(2 * middleRad);
  const gain = Math.hypot(re, im) / (2 * Math.sin(middleRad));
  return { b0: gain, b1: 0, b2: -gain, a1, a2 };
}

function complexSqrt(re: number, im: number): { re: number; im: number } {
  const size = Math.hypot(re, im);
  const rootRe = Math.sqrt((size + Math.abs(re)) / 2);
  if (rootRe === 0) return { re: 0, im: 0 };
  const other = im / (2 * rootRe);
  if (re >= 0) return { re: rootRe, im: other };
  return im >= 0 ? { re: other, im: rootRe } : { re: -other, im: -rootRe };
}

function checkOrder(order: number): void {
  if (!Number.isInteger(order) || order < 1) {
    throw new RangeError(`filter order ${order}: it must be a whole number from 1`);
  }
}

function checkFrequency(hz: number, rateHz: number): void {
  if (!(hz > 0 && hz < rateHz / 2)) {
    throw new RangeError(
      `${hz} Hz at ${rateHz} Hz sampling: it must be within 0 and half the rate`,
    );
  }
}
