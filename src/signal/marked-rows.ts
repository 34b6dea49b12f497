/** Rows with times of their own, as they pass through row stages: a value and a byte of marks per channel. */
export interface MarkedRows {
  /** Arrays may be longer. */
  readonly count: number;
  /** Integer microseconds, strictly increasing over the series. */
  readonly times: Float64Array;
  /** One array per channel. NaN is absent: MISSING when never written, SCREENED when a stage kept it out. */
  readonly columns: readonly Float64Array[];
  readonly marks: readonly Uint8Array[];
}
