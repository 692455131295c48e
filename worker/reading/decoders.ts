import type { DecodePool } from './decodePool.ts'

/** What the platform does for the readers: a browser by its image decoder, a test in Node by another library. */
export interface Decoders {
  /**
   * Decodes a whole JPEG or WebP that carries no metadata to 8-bit samples of shape [height, width, channels],
   * without colour management, turning or premultiplication. Rejects where the data cannot be decoded.
   */
  decodeImage(file: Blob, shape: DecodedShape): Promise<Uint8Array>
  /** Workers to unpack blocks and to hash side by side; without them all is done on the caller's thread. */
  pool?: DecodePool
}

export interface DecodedShape {
  width: number
  height: number
  channels: 1 | 3 | 4
}
