import { Fault } from '../check.ts'

/** Side of the squares read through a texture: every WebGL holds textures of this size. */
const side = 2048

/**
 * RGBA of a bitmap with alpha, shape [height, width, 4], as decoded. A 2-D canvas multiplies colours with alpha and loses
 * what is below half a step; a texture keeps the bytes as they are.
 */
export async function readStraightAlpha(bitmap: ImageBitmap): Promise<Uint8Array> {
  const { width, height } = bitmap
  const gl = new OffscreenCanvas(1, 1).getContext('webgl2')
  if (!gl) {
    throw new Fault(
      'unsupported',
      'alpha channel',
      4,
      'the WebP has an alpha channel, which this browser cannot read exactly (WebGL is switched off). Save it again without alpha, or as PNG.',
    )
  }
  const samples = new Uint8Array(width * height * 4)
  gl.bindTexture(gl.TEXTURE_2D, gl.createTexture())
  gl.bindFramebuffer(gl.FRAMEBUFFER, gl.createFramebuffer())
  gl.pixelStorei(gl.UNPACK_PREMULTIPLY_ALPHA_WEBGL, false)
  gl.pixelStorei(gl.UNPACK_COLORSPACE_CONVERSION_WEBGL, gl.NONE)
  for (let y = 0; y < height; y += side) {
    for (let x = 0; x < width; x += side) {
      const columns = Math.min(side, width - x)
      const rows = Math.min(side, height - y)
      const part = await createImageBitmap(bitmap, x, y, columns, rows, {
        premultiplyAlpha: 'none',
        colorSpaceConversion: 'none',
      })
      const pixels = readTexture(gl, part)
      part.close()
      for (let row = 0; row < rows; row++) {
        samples.set(pixels.subarray(row * columns * 4, (row + 1) * columns * 4), ((y + row) * width + x) * 4)
      }
    }
  }
  gl.getExtension('WEBGL_lose_context')?.loseContext()
  return samples
}

function readTexture(gl: WebGL2RenderingContext, bitmap: ImageBitmap): Uint8Array {
  gl.texImage2D(gl.TEXTURE_2D, 0, gl.RGBA, gl.RGBA, gl.UNSIGNED_BYTE, bitmap)
  const texture = gl.getParameter(gl.TEXTURE_BINDING_2D) as WebGLTexture
  gl.framebufferTexture2D(gl.FRAMEBUFFER, gl.COLOR_ATTACHMENT0, gl.TEXTURE_2D, texture, 0)
  const pixels = new Uint8Array(bitmap.width * bitmap.height * 4)
  gl.readPixels(0, 0, bitmap.width, bitmap.height, gl.RGBA, gl.UNSIGNED_BYTE, pixels)
  return pixels
}
