import type { Draws } from './draws.ts'

const HOUR = 3_600_000

/** Hourly weather; hour i covers [from + i h, from + (i + 1) h). NaN where nothing is known; harm comes of known rain only. */
export interface Weather {
  readonly from: number
  /** mm in the hour. */
  readonly rain: Float64Array
  /** °C. */
  readonly temperature: Float64Array
  /** %. */
  readonly humidity: Float64Array
}

/** The kind of weather that `drawWeather` makes. */
export interface Climate {
  /** Mean number of wet spells in a week. */
  readonly spellsPerWeek: number
  readonly meanC: number
  /** Half the difference of day and night. */
  readonly swingC: number
}

/**
 * Draws weather for [from, to): wet spells as a Poisson process, each some hours of showers; temperature with a daily wave that is
 * lowest about `lowestUtcHour`, slow fronts over it; humidity that falls as it warms and rises with rain.
 */
export function drawWeather(from: number, to: number, climate: Climate, random: Draws, lowestUtcHour = 4): Weather {
  const start = Math.floor(from / HOUR) * HOUR
  const hours = Math.ceil((to - start) / HOUR) + 1
  const rain = new Float64Array(hours)
  const meanGap = (7 * 24) / Math.max(1e-6, climate.spellsPerWeek)
  for (let h = random.exponential(meanGap); h < hours; h += random.exponential(meanGap)) {
    const length = Math.max(1, Math.round(random.logNormal(5, 0.6)))
    const strength = random.logNormal(1.2, 0.7)
    for (let k = Math.floor(h); k < Math.min(hours, Math.floor(h) + length); k++) {
      if (random.chance(0.85)) rain[k] = Math.round(rain[k]! * 10 + 10 * random.exponential(strength)) / 10
    }
    h += length
  }
  const temperature = new Float64Array(hours)
  const humidity = new Float64Array(hours)
  let front = random.normal(0, 2)
  for (let h = 0; h < hours; h++) {
    front = 0.98 * front + random.normal(0, 0.45)
    const wave = -Math.cos((2 * Math.PI * (start / HOUR + h - lowestUtcHour)) / 24)
    const wet = rain[h]! > 0
    const celsius = climate.meanC + climate.swingC * wave * (wet ? 0.5 : 1) + front
    temperature[h] = Math.round(celsius * 10) / 10
    const percent = 68 - 2.2 * (climate.swingC * wave) + (wet ? 20 : 0) + random.normal(0, 3)
    humidity[h] = Math.round(Math.min(100, Math.max(15, percent)))
  }
  return { from: start, rain, temperature, humidity }
}

/** How damp lets an outdoor part leak. */
export interface Damping {
  /** From rain falling to water arriving where it harms. */
  readonly lagHours: number
  readonly decayHours: number
  /** mm of water in the part at which its leakage reaches 63 % of the most. */
  readonly soakMm: number
}

/**
 * Wetness of a part, 0 to 1, each minute of [from, to): rain comes in `lagHours` later, spread over its hour, dries
 * exponentially, and saturates. A leaky store: dW/dt = rain(t − lag) − W/decay, wetness 1 − exp(−W/soak).
 */
export function wetness(weather: Weather, damping: Damping, from: number, to: number): Float64Array {
  const minutes = Math.ceil((to - from) / 60_000) + 1
  const out = new Float64Array(minutes)
  const keep = Math.exp(-1 / (60 * damping.decayHours))
  let water = 0
  // Begins a lag and some decays before `from`, so that earlier rain given in the weather still counts.
  const lead = Math.ceil((damping.lagHours + 4 * damping.decayHours) * 60)
  for (let m = -lead; m < minutes; m++) {
    const hour = Math.floor((from + m * 60_000 - damping.lagHours * HOUR - weather.from) / HOUR)
    const fallen = weather.rain[hour]
    const arriving = fallen !== undefined && Number.isFinite(fallen) ? fallen / 60 : 0
    water = water * keep + arriving
    if (m >= 0) out[m] = 1 - Math.exp(-water / damping.soakMm)
  }
  return out
}
