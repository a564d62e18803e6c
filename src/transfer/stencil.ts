/** Sources and weights of one target; the weights sum to 1. */
export interface Stencil {
  count: number;
  readonly sources: Int32Array;
  readonly weights: Float64Array;
  /** Code of the `Outside` array. */
  outside: number;
  /** Distance to the cloud's nearest point for targets outside, 0 inside, m. */
  distance: number;
}

export function createStencil(largest: number): Stencil {
  return {
    count: 0,
    sources: new Int32Array(largest),
    weights: new Float64Array(largest),
    outside: 0,
    distance: 0,
  };
}
