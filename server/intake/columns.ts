import {
  type Channel,
  EARLIEST_MS,
  LATEST_MS,
  MAX_READINGS_PER_BODY,
  PLAUSIBLE,
  type ProblemIssue,
  ReadingsIn,
  readInstant,
  type SiteSheet,
} from '../../core/contract/index.ts'
import type { ReadingBatch } from '../store/port.ts'
import { check } from './check.ts'
import { Refused } from './refused.ts'
import { Refusals, type Taken } from './taken.ts'
import { whyNoValue } from './value.ts'

/**
 * Reads JSON columns. A bad reading is refused alone; a bad structure refuses the body.
 * @throws {Refused} unequal columns, an unknown channel, something that is no column, more readings than a body may carry
 */
export function takeColumns(body: unknown, sheet: SiteSheet): Taken {
  const { blocks } = check(ReadingsIn, body)
  const channels = new Map(sheet.channels.map((channel) => [channel.ref, channel]))
  const faults: ProblemIssue[] = []
  let given = 0
  blocks.forEach(({ channel, t, v }, b) => {
    given += t.length
    if (!channels.has(channel)) {
      faults.push({ path: `/blocks/${b}/channel`, why: `there is no channel "${channel}" on the sheet of this site` })
    }
    if (t.length !== v.length) {
      faults.push({ path: `/blocks/${b}/v`, why: `unequal columns: ${t.length} times, ${v.length} values` })
    }
  })
  if (faults.length > 0) throw new Refused('The columns do not fit.', faults)
  if (given > MAX_READINGS_PER_BODY) {
    const why = `A body carries at most ${MAX_READINGS_PER_BODY} readings, this one ${given}; post it in parts.`
    throw new Refused(why, [], { kind: 'too-large' })
  }
  const refusals = new Refusals()
  const batches = blocks.map((block, b) => takeBlock(b, block.t, block.v, channels.get(block.channel)!, refusals))
  return { batches: batches.filter((batch) => batch.t.length > 0), given, refusals }
}

/** One block in one loop: the usual reading costs two comparisons a column and no call. */
function takeBlock(
  block: number,
  times: readonly unknown[],
  values: readonly unknown[],
  channel: Channel,
  refusals: Refusals,
): ReadingBatch {
  const n = times.length
  const t = new Float64Array(n)
  const v = new Float64Array(n)
  const [least, greatest] = PLAUSIBLE[channel.quantity]
  const onlyEnds = channel.quantity === 'running'
  let kept = 0
  for (let i = 0; i < n; i++) {
    const value = values[i]
    const good = typeof value === 'number' && value >= least && value <= greatest
    if (!good || (onlyEnds && value !== 0 && value !== 1)) {
      const why = whyNoValue(value, channel.quantity) ?? 'this value cannot be taken'
      refusals.add(block, i, 'v', why)
      continue
    }
    let time = times[i]
    if (typeof time !== 'number' || !(time >= EARLIEST_MS && time < LATEST_MS) || Math.floor(time) !== time) {
      const read = readInstant(time)
      if (!('ms' in read)) {
        refusals.add(block, i, 't', read.why)
        continue
      }
      time = read.ms
    }
    t[kept] = time as number
    v[kept] = value
    kept++
  }
  return { channel: channel.ref, t: t.subarray(0, kept), v: v.subarray(0, kept) }
}
