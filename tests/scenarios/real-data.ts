import { readFileSync } from 'node:fs'
import type { RealLoad } from '../../core/simulate/overlay.ts'
import type { Weather } from '../../core/simulate/weather.ts'

const HOUR = 3_600_000

/** Above this many watts a load runs; from the records' own idle levels. 40 W where not named. */
const RUNNING_WATTS: Readonly<Record<string, number>> = {
  fridge: 30,
  fridge_a: 30,
  kettle: 500,
  coffee_maker: 200,
  dishwasher: 20,
  washing_machine: 10,
  microwave: 100,
  tv: 15,
  tv_lcd: 15,
  tv_crt: 15,
  monitor: 15,
  amplifier: 15,
  lamp: 15,
}

/** The rows of a CSV of `fixtures/data`, the first line apart. */
function table(file: string): { readonly head: readonly string[]; readonly rows: readonly (readonly string[])[] } {
  const text = readFileSync(new URL(`../../fixtures/data/${file}`, import.meta.url), 'utf8')
  const [head, ...rows] = text.trimEnd().split('\n')
  return { head: head!.split(','), rows: rows.map((row) => row.split(',')) }
}

/** Loads of a household as 0 and 1 each minute; an empty cell is no reading. Times stand on the wall at UTC+02:00. */
export function realLoads(house: 'house-b' | 'house-c'): { loads: RealLoad[]; from: number; to: number } {
  const { head, rows } = table(`${house}/loads.csv`)
  const times = rows.map(([time]) => Date.parse(`${time}+02:00`))
  const loads = head.slice(1).map((column, c): RealLoad => {
    const name = column.replace(/_w$/, '')
    const known = rows.flatMap((row, i) => (row[c + 1] === '' ? [] : [i]))
    return {
      ref: name.replaceAll('_', '-'),
      label: name.replaceAll('_', ' '),
      running: {
        t: Float64Array.from(known, (i) => times[i]!),
        v: Float64Array.from(known, (i) => (Number(rows[i]![c + 1]) >= (RUNNING_WATTS[name] ?? 40) ? 1 : 0)),
      },
    }
  })
  return { loads, from: times[0]!, to: times.at(-1)! + 60_000 }
}

/** The hourly record of November 2015, moved by whole days so that it begins two days before `from`. */
export function realWeather(from: number): Weather {
  const { head, rows } = table('weather-c/hourly.csv')
  const start = Date.parse(rows[0]![0]!)
  const hours = Math.round((Date.parse(rows.at(-1)![0]!) - start) / HOUR) + 1
  const column = (name: string): Float64Array => {
    const values = new Float64Array(hours).fill(Number.NaN)
    const c = head.indexOf(name)
    for (const row of rows) {
      const text = row[c]
      if (text) values[Math.round((Date.parse(row[0]!) - start) / HOUR)] = Number(text)
    }
    return values
  }
  const days = Math.floor((from - 48 * HOUR - start) / (24 * HOUR))
  return {
    from: start + days * 24 * HOUR,
    rain: column('rain_mm'),
    temperature: column('temperature_c'),
    humidity: column('humidity_pct'),
  }
}
