/**
 * Sets of time as sorted, disjoint, half-open intervals [from, to), epoch ms, flattened: from0, to0, from1, to1, …
 * Touching intervals are one. All functions leave their inputs alone and run in linear time.
 */
export type Spans = Float64Array
