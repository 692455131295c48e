const table = Uint32Array.from({ length: 256 }, (_, byte) => {
  let value = byte
  for (let bit = 0; bit < 8; bit++) value = value & 1 ? (value >>> 1) ^ 0xedb88320 : value >>> 1
  return value
})

/** CRC-32 (ISO 3309, polynomial 0xEDB88320), as zip has it; `before` is that of the bytes before these. */
export function crc32(bytes: Uint8Array, before = 0): number {
  let crc = ~before
  for (const byte of bytes) crc = (crc >>> 8) ^ table[(crc ^ byte) & 0xff]
  return ~crc >>> 0
}
