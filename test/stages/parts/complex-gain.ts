/**
 * Complex gain of outputs first, first + 1, … against cos(2 pi f k + phase) at their own index k, by least squares.
 * @param f  cycles/sample, away from 0 and 0.5
 */
export function complexGain(
  first: number,
  y: Float64Array,
  f: number,
  phase: number,
): { re: number; im: number } {
  let [cc, cs, ss, yc, ys] = [0, 0, 0, 0, 0];
  y.forEach((v, i) => {
    if (Number.isNaN(v)) return;
    const a = 2 * Math.PI * ((f * (first + i)) % 1) + phase;
    const [c, s] = [Math.cos(a), Math.sin(a)];
    cc += c * c;
    cs += c * s;
    ss += s * s;
    yc += v * c;
    ys += v * s;
  });
  const det = cc * ss - cs * cs;
  return { re: (yc * ss - ys * cs) / det, im: -(ys * cc - yc * cs) / det };
}
