/**
 * Luminance of linear or coded red, green and blue (ITU-R BT.709-6, 2015, item 3.2): 0.2126 R + 0.7152 G + 0.0722 B.
 */
export const luminanceWeights = [0.2126, 0.7152, 0.0722] as const

/** Row Y of the matrix from linear sRGB to XYZ under D65, to the digits that L*a*b* conversions are published with. */
export const tristimulusWeights = [0.2126729, 0.7151522, 0.072175] as const

/** Linear light, 0 to 1, of a coded sRGB value, 0 to 1 (IEC 61966-2-1:1999; threshold 0.04045). */
export function linearFromCoded(coded: number): number {
  return coded <= 0.04045 ? coded / 12.92 : ((coded + 0.055) / 1.055) ** 2.4
}

/** CIE 1976 lightness L*, 0 to 100, of a luminance Y relative to white (CIE 15:2004; the constants are (6/29)^3 and (29/3)^3). */
export function lightnessOf(luminance: number): number {
  return luminance > 216 / 24389 ? 116 * Math.cbrt(luminance) - 16 : (24389 / 27) * luminance
}
