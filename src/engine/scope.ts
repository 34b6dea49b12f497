/** The stretch of time that outputs and figures cover; samples outside it are only context. */
export interface Scope {
  /** First microsecond inside; -Infinity when open. */
  readonly from_us: number;
  /** First microsecond after; Infinity when open. */
  readonly until_us: number;
}

export const WHOLE_RECORD: Scope = { from_us: Number.NEGATIVE_INFINITY, until_us: Number.POSITIVE_INFINITY };
