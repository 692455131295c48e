import sharp from 'sharp'
import type { Decoders } from '../../worker/reading/decoders.ts'

/** sharp in the place of the browser's image decoder: for the few TIFFs that our own reader reads headless, and for tests. */
export const sharpDecoders: Decoders = {
  async decodeImage(file, { width, height, channels }) {
    const { data, info } = await sharp(await file.arrayBuffer(), {
      ignoreIcc: true,
      limitInputPixels: false,
      unlimited: true,
    })
      .toColourspace(channels === 1 ? 'b-w' : 'srgb')
      .raw()
      .toBuffer({ resolveWithObject: true })
    if (info.width !== width || info.height !== height || info.channels !== channels) {
      throw new Error(`decoded to ${info.width} x ${info.height} with ${info.channels} channels`)
    }
    return new Uint8Array(data.buffer, data.byteOffset, data.length)
  },
}
