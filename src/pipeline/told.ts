/** What the kinds of settings are told, and how they say it. */

/** What every kind is told: one sentence, and the default as it would stand in the file. */
export interface Told<D> {
  readonly about: string;
  readonly default?: D;
  /** A value as it would stand in the file, for diagnostics; the default when left out. */
  readonly example?: string;
}

/** Both limits belong to the range. */
export interface Range {
  readonly min?: number;
  readonly max?: number;
}

export const matching = (pattern: string) => () => ({ type: "string", pattern });

export const withDefault = (d: string | number | boolean | undefined) =>
  d === undefined ? {} : { default: String(d) };

export function within(value: number, { min, max }: Range): boolean {
  return (min === undefined || value >= min) && (max === undefined || value <= max);
}

export function span(min: string | number | undefined, max: string | number | undefined): string {
  if (min !== undefined && max !== undefined) return `from ${min} to ${max}`;
  if (min !== undefined) return `${min} or more`;
  return max === undefined ? "" : `${max} or less`;
}
