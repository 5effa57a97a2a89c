/**
 * ln(1 + x) − x for x > −1 without the cancellation of the plain difference near 0.
 * Near 0 it uses ln(1 + x) = 2 artanh(y), y = x / (2 + x): the result is then −x y + 2 (y³/3 + y⁵/5 + …).
 *
 * @see Abramowitz & Stegun (1964), 4.1.27
 */
export function log1pMinus(x: number): number {
  if (x < -0.5 || x > 0.7) return Math.log1p(x) - x
  const y = x / (2 + x)
  const y2 = y * y
  let term = 2 * y * y2
  let tail = 0
  for (let k = 3; k < 90; k += 2) {
    const next = tail + term / k
    if (next === tail) break
    tail = next
    term *= y2
  }
  return tail - x * y
}
