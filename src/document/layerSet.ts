/** How a counter marked a boundary. `rejected` remembers that a proposal was looked at and is none. */
export const marks = ['certain', 'doubtful', 'rejected'] as const
export type Mark = (typeof marks)[number]

/**
 * One count's boundaries: columns of equal length [boundaries], sorted by position; copied on write.
 * 21 bytes a boundary, so that 20,000 of them are copied in tens of microseconds.
 */
export interface LayerSet {
  /** Stable id, unique within the count. */
  readonly id: Uint32Array
  /** Path pixels. */
  readonly position: Float64Array
  /** Index into `marks`. */
  readonly mark: Uint8Array
  /** Sequence number of the transaction that last set this boundary: its provenance. */
  readonly origin: Uint32Array
}
