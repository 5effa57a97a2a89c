import { CoreError } from '../../errors.ts'
import { leastSquares } from '../../statistics/least-squares.ts'
import { nnls } from '../../statistics/nnls.ts'
import { stateAt } from '../../timeline/exposure.ts'
import type { Series } from '../../timeline/series.ts'
import { eachSpan } from '../../timeline/spans.ts'
import type { Timeline } from '../../timeline/timeline.ts'
import { levelBetween } from '../levels.ts'
import { resemblance } from '../resemblance.ts'

const HOUR_MS = 3_600_000
/** Blocks are made longer rather than more than this many. */
const MOST_BLOCKS = 600
/** Hours that a thing must have been on and off while the level was logged. */
const LEAST_HOURS = 2

/** What levels with a thing on and off say of it, mA. */
export interface LevelFigure {
  readonly ma: number
  readonly error: number
  readonly freedom: number
}

/**
 * Non-negative least squares of hourly levels on states, for things that were on in some and off in others without a switching
 * that the log shows (Lawson & Hanson 1974, chapter 23). What switching tells of other things is taken off first. Weak: weather and habit do not
 * cancel. Errors are those of plain least squares, wider by how much neighbouring hours resemble each other. Key:
 * position of the thing; things that the levels cannot part are left out.
 */
export function figuresByLevels(
  timeline: Timeline,
  leakage: Series,
  wanted: readonly number[],
  known: ReadonlyMap<number, number>,
): Map<number, LevelFigure> {
  const found = new Map<number, LevelFigure>()
  const blocks = blocksOf(timeline, leakage, wanted, known)
  const usable = wanted.filter((_, k) => {
    const on = blocks.filter((block) => block.on[k] === 1).length
    return Math.min(on, blocks.length - on) * (blocks[0]?.hours ?? 0) >= LEAST_HOURS
  })
  if (usable.length === 0 || blocks.length < usable.length + 4) return found
  const design = blocks.map((block) => [1, ...usable.map((thing) => block.on[wanted.indexOf(thing)]!)])
  const y = blocks.map((block) => block.level)
  try {
    const plain = leastSquares(design, y)
    const wider = Math.sqrt(resemblance(plain.residuals, blocks.length))
    const { coefficients } = nnls(design, y)
    usable.forEach((thing, k) => {
      const error = (plain.standardErrors?.[k + 1] ?? Number.NaN) * wider
      if (!(error > 0)) return
      const freedom = Math.max(1, blocks.length / wider ** 2 - usable.length - 1)
      found.set(thing, { ma: coefficients[k + 1]!, error, freedom })
    })
  } catch (error) {
    // Always on and off together: the levels cannot part them.
    if (!(error instanceof CoreError && error.code === 'singular')) throw error
  }
  return found
}

interface Block {
  readonly level: number
  readonly hours: number
  /** 1 or 0 for each wanted thing. */
  readonly on: readonly number[]
}

/** Logged hours in which the state of every wanted thing stands still and is known. */
function blocksOf(
  timeline: Timeline,
  leakage: Series,
  wanted: readonly number[],
  known: ReadonlyMap<number, number>,
): Block[] {
  const hours = Math.max(1, Math.ceil((timeline.to - timeline.from) / HOUR_MS / MOST_BLOCKS))
  const blocks: Block[] = []
  for (const { from, to } of eachSpan(timeline.logged)) {
    for (let at = from; at + hours * HOUR_MS <= to; at += hours * HOUR_MS) {
      const end = at + hours * HOUR_MS
      const states = wanted.map((thing) => {
        const { state } = timeline.things[thing]!
        const here = stateAt(state, at)
        return here === stateAt(state, (at + end) / 2) && here === stateAt(state, end - 1) ? here : 'unknown'
      })
      if (states.includes('unknown')) continue
      let level = levelBetween(leakage, at, end, 3)
      for (const [thing, ma] of known) {
        if (stateAt(timeline.things[thing]!.state, (at + end) / 2) === 'on') level -= ma
      }
      if (!Number.isNaN(level)) blocks.push({ level, hours, on: states.map((state) => (state === 'on' ? 1 : 0)) })
    }
  }
  return blocks
}
