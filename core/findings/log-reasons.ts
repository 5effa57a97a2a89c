import type { Reason } from '../contract/findings.ts'
import type { Timeline } from '../timeline/timeline.ts'
import type { Measured } from './candidates.ts'
import type { LogView } from './log-view.ts'
import { whenWords } from './timed/timed-step.ts'
import { countOf, current, figure, rounded } from './words.ts'

/** What the log and the tests say of a suspect by themselves, whatever the trips did; null when nothing. */
export function logReason(timeline: Timeline, of: string, measured: Measured, log: LogView): Reason | null {
  switch (of) {
    case 'clock':
    case 'period':
    case 'sun':
      return timedReason(of, log)
    case 'unlisted':
      return excursionReason(log)
    case 'rain':
      return rainReason(log)
    case 'load-current':
      return currentReason(log)
    case 'standing':
      return levelReason(log)
    case 'device':
      return deviceReason(timeline, measured)
    case 'supply':
      return supplyReason(measured)
    case 'none':
      return quietReason(timeline, measured, log)
    default:
      return null
  }
}

function timedReason(of: string, log: LogView): Reason | null {
  const cluster = log.timed.find(({ schedule }) => schedule.kind === of)
  if (cluster === undefined) return null
  const { heightMa, minutes, count, schedule } = cluster
  return {
    text: `The log shows a load that nobody named: about ${current(heightMa)} mA, ${whenWords(schedule)}, ${countOf(count, 'time')}; the usual headroom is ${current(log.roomMa)} mA.`,
    method: 'change points of what the named loads leave unexplained, and the schedule they keep',
    figures: { heightMa: rounded(heightMa), minutes: rounded(minutes), count, usualHeadroomMa: rounded(log.roomMa) },
  }
}

function excursionReason({ unexplained, roomMa }: LogView): Reason | null {
  if (unexplained === null || unexplained.apart === 0) return null
  const { heightMa, apart } = unexplained
  return {
    text: `Apart from trips the log shows the level up by about ${current(heightMa)} mA ${countOf(apart, 'time')} without a listed load to account for it; the usual headroom is ${current(roomMa)} mA.`,
    method: 'level less what the budget says was on',
    figures: { stretches: apart, heightMa: rounded(heightMa), usualHeadroomMa: rounded(roomMa) },
  }
}

function rainReason({ wetLift }: LogView): Reason | null {
  if (wetLift === null) return null
  const { ma, halfLife, lag, correlation } = wetLift
  const late = lag > 0 ? `, felt ${figure(lag)} h late` : ''
  const text =
    ma < 0.1
      ? 'The leakage does not rise with rain.'
      : `In the wettest hours the leakage stands ${current(ma)} mA higher than in dry ones (drying by half in ${figure(halfLife)} h${late}).`
  return {
    text,
    method: 'antecedent precipitation (Kohler & Linsley 1951) against the level',
    figures: { riseMa: rounded(ma), halfLifeHours: halfLife, lagHours: lag, correlation: rounded(correlation) },
  }
}

function currentReason({ withCurrent }: LogView): Reason | null {
  if (withCurrent === null) return null
  const { correlation, maPerAmp, reach, follows } = withCurrent
  const text =
    follows === true
      ? `The leakage follows the load current of the whole group, whichever load carries it: about ${figure(maPerAmp)} mA for each ampere.`
      : follows === false
        ? 'The leakage does not follow the load current of the whole group.'
        : 'Whether the leakage follows the load current of the whole group cannot be told.'
  return {
    text,
    method: 'correlation of the five-minute changes of leakage and load current, both squared',
    figures: { correlation: rounded(correlation), maPerAmp: rounded(maPerAmp), shareOfHeadroom: rounded(reach) },
  }
}

function levelReason({ usualShare, tripMa }: LogView): Reason | null {
  if (usualShare === null) return null
  return {
    text: `The usual leakage stands at ${Math.round(100 * usualShare)} % of the trip current of ${current(tripMa)} mA.`,
    method: 'time-weighted median of the level over the trip current',
    figures: { usualShare: rounded(usualShare), tripMa: rounded(tripMa) },
  }
}

/** The current below which the standards forbid a trip, as a share of the rating: IEC 61008-1, IEC 61009-1 (from memory). */
const HALF = 0.5

function deviceReason(timeline: Timeline, { headroom }: Measured): Reason | null {
  const { tripMa, standingMa } = headroom
  const half = HALF * timeline.rcd.ratedMa
  if (tripMa.basis === 'ramp-tests') {
    return {
      text: `The ramp test found ${current(tripMa.value)} mA; a sound ${timeline.rcd.ratedMa} mA device must not open below ${current(half)} mA.`,
      method: 'ramp test against 0.5 IΔn (IEC 61008-1, IEC 61009-1)',
      figures: { tripMa: rounded(tripMa.value), half },
    }
  }
  if (standingMa === null) return null
  return {
    text: `The leakage was never seen above ${current(standingMa.max)} mA; a sound ${timeline.rcd.ratedMa} mA device must not open below ${current(half)} mA. Only a ramp test can settle it.`,
    method: 'greatest level against 0.5 IΔn (IEC 61008-1, IEC 61009-1)',
    figures: { maxMa: rounded(standingMa.max), half },
  }
}

function supplyReason({ trips }: Measured): Reason | null {
  const shared = trips.filter(({ course }) => course === 'shared').length
  if (trips.length === 0) return null
  return {
    text:
      shared === 0
        ? 'At no trip did another device open or the voltage leave its band.'
        : `At ${shared} of ${trips.length} trips another device opened too, or the voltage had left its band.`,
    method: 'coincidence of trips across devices; supply voltage within 10 % (EN 50160, from memory)',
    figures: { shared, trips: trips.length },
  }
}

function quietReason(timeline: Timeline, { trips }: Measured, log: LogView): Reason | null {
  const seen = trips.filter(({ course }) => course !== 'unseen').length
  if (seen === 0) return null
  const sudden = trips.filter(({ course }) => course === 'sudden').length
  const [of, lift] = [...log.lifts].reduce<readonly [string, { readonly topMa: number }]>(
    (most, next) => (next[1].topMa > most[1].topMa ? next : most),
    ['', { topMa: 0 }],
  )
  const label = timeline.things.find((t) => t.of === of)?.label
  const largest =
    label === undefined
      ? ''
      : ` The largest rise that a listed load brings is ${current(lift.topMa)} mA (${label}); the usual headroom is ${current(log.roomMa)} mA.`
  return {
    text: `${sudden} of ${seen} trips that the log shows came without warning.${largest}`,
    method: 'course of the leakage before each trip; level over that before each start',
    figures: { sudden, logged: seen, largestRiseMa: rounded(lift.topMa), usualHeadroomMa: rounded(log.roomMa) },
  }
}
