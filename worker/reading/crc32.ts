/** CRC-32 of ISO 3309 as PNG uses it (PNG specification, annex D). */
export function crc32(bytes: Uint8Array): number {
  let crc = ~0
  for (const byte of bytes) crc = table[(crc ^ byte) & 0xff] ^ (crc >>> 8)
  return ~crc >>> 0
}

const table = Int32Array.from({ length: 256 }, (_, index) => {
  let crc = index
  for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? 0xedb88320 ^ (crc >>> 1) : crc >>> 1
  return crc
})
