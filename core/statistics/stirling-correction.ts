/**
 * What Stirling's formula leaves out: ln Γ(x) − [(x − ½) ln x − x + ½ ln 2π], for x > 0. The same number is the
 * `stirlerr` of ln Γ(x + 1) − [(x + ½) ln x − x + ½ ln 2π], which keeps probabilities of large counts exact.
 * Below 15 the recurrence c(x) = c(x + 1) + (x + ½) ln(1 + 1/x) − 1 leads up to where the series holds.
 *
 * @see Abramowitz & Stegun (1964), 6.1.41; Loader (2000), Fast and accurate computation of binomial probabilities
 */
export function stirlingCorrection(x: number): number {
  let sum = 0
  let z = x
  while (z < 15) {
    sum += (z + 0.5) * Math.log1p(1 / z) - 1
    z += 1
  }
  const r = 1 / (z * z)
  const series =
    (1 / 12 - r * (1 / 360 - r * (1 / 1260 - r * (1 / 1680 - r * (1 / 1188 - r * (691 / 360360 - r / 156)))))) / z
  return sum + series
}
