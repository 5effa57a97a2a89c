const RADIANS = Math.PI / 180

/**
 * Elevation of the sun's centre over the horizon, degrees, at an instant (epoch ms) and place (degrees, east positive), without
 * refraction. Low-precision formulas of the Astronomical Almanac (page C5 of its yearly editions), good to about 0.01° between
 * 1950 and 2050. A photocell sees light, not a calendar: its switching follows from this.
 */
export function sunElevation(t: number, latitude: number, longitude: number): number {
  const days = (t - Date.UTC(2000, 0, 1, 12)) / 86_400_000
  const meanLongitude = 280.46 + 0.9856474 * days
  const anomaly = (357.528 + 0.9856003 * days) * RADIANS
  const ecliptic = (meanLongitude + 1.915 * Math.sin(anomaly) + 0.02 * Math.sin(2 * anomaly)) * RADIANS
  const tilt = (23.439 - 0.0000004 * days) * RADIANS
  const rightAscension = Math.atan2(Math.cos(tilt) * Math.sin(ecliptic), Math.cos(ecliptic))
  const declination = Math.asin(Math.sin(tilt) * Math.sin(ecliptic))
  const siderealDegrees = 280.46062 + 360.985647 * days + longitude
  const hourAngle = siderealDegrees * RADIANS - rightAscension
  const phi = latitude * RADIANS
  const sine = Math.sin(phi) * Math.sin(declination) + Math.cos(phi) * Math.cos(declination) * Math.cos(hourAngle)
  return Math.asin(Math.max(-1, Math.min(1, sine))) / RADIANS
}

/**
 * When the sun stands below `degrees` within [from, to), as pairs of epoch ms, each edge found to the second by
 * halving.
 */
export function darkHours(
  from: number,
  to: number,
  latitude: number,
  longitude: number,
  degrees: number,
): [number, number][] {
  const below = (t: number): boolean => sunElevation(t, latitude, longitude) < degrees
  const pairs: [number, number][] = []
  const step = 600_000
  let begun = below(from) ? from : Number.NaN
  for (let t = from; t < to; t += step) {
    const end = Math.min(to, t + step)
    const dark = !Number.isNaN(begun)
    if (below(end) === dark) continue
    const edge = edgeBetween(t, end, (x) => below(x) !== dark)
    if (dark) pairs.push([begun, edge])
    begun = dark ? Number.NaN : edge
  }
  if (!Number.isNaN(begun) && begun < to) pairs.push([begun, to])
  return pairs
}

function edgeBetween(a: number, b: number, reached: (t: number) => boolean): number {
  let low = a
  let high = b
  while (high - low > 1_000) {
    const middle = (low + high) / 2
    if (reached(middle)) high = middle
    else low = middle
  }
  return Math.round(high)
}
