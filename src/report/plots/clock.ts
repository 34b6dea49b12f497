/** Ticks in 24-hour time, as fine as their spacing needs, or as dates; the same in every locale. */
export function clockFormat(ticks: readonly Date[]): (d: Date) => string {
  const part = (d: Date, from: number, to: number) => d.toISOString().slice(from, to);
  const step_s = ticks.length < 2 ? 1 : (ticks[1]!.getTime() - ticks[0]!.getTime()) / 1000;
  if (step_s > 27 * 86_400) return (d) => part(d, 0, 7);
  if (step_s >= 86_400) return (d) => part(d, 5, 10);
  if (step_s >= 60) return (d) => (part(d, 11, 16) === "00:00" ? part(d, 5, 10) : part(d, 11, 16));
  return (d) => part(d, 11, step_s >= 1 ? 19 : 23);
}
