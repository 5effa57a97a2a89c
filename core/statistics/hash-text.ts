/**
 * A 32-bit hash of text: FNV-1a over its UTF-16 code units, then a final mixing so that near texts differ in all bits.
 * For seeds and bucket names only; it is no protection against anyone.
 *
 * @see Fowler, Noll & Vo (1991), FNV-1a; Appleby (2011), MurmurHash3 (the finaliser)
 */
export function hashText(text: string, salt = 0): number {
  let h = (0x811c9dc5 ^ salt) >>> 0
  for (let i = 0; i < text.length; i++) {
    const unit = text.charCodeAt(i)
    h = Math.imul(h ^ (unit & 0xff), 0x01000193)
    h = Math.imul(h ^ (unit >>> 8), 0x01000193)
  }
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b)
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35)
  return (h ^ (h >>> 16)) >>> 0
}
