const TABLE = new Int32Array(256)
for (let i = 0; i < 256; i++) {
  let c = i
  for (let bit = 0; bit < 8; bit++) c = c & 1 ? (c >>> 1) ^ 0xedb88320 : c >>> 1
  TABLE[i] = c
}

/**
 * CRC-32 of ISO-HDLC (reflected polynomial 0xEDB88320), as an unsigned 32-bit number. Written here because node:zlib
 * has one only from 20.15 on, and the program promises 20.11.
 */
export function crc32(bytes: Uint8Array): number {
  let c = -1
  for (let i = 0; i < bytes.length; i++) c = (c >>> 8) ^ TABLE[(c ^ bytes[i]!) & 255]!
  return ~c >>> 0
}
