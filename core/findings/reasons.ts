import type { Grade, Reason } from '../contract/findings.ts'
import { totalMs } from '../timeline/spans.ts'
import type { Timeline } from '../timeline/timeline.ts'
import type { Measured } from './candidates.ts'
import { logReason } from './log-reasons.ts'
import type { LogView } from './log-view.ts'
import type { Preference } from './preference.ts'
import { habitReason, ratioReason } from './preferring/habit-reason.ts'
import { HOUR_MS } from './windows/trip-share.ts'
import { current, figure, pValue, rounded, sentence } from './words.ts'

const MOST_REASONS = 4

/**
 * Two to four reasons for a suspect's place in the line-up, the weightiest first, in plain words with figures.
 * `leader` is the name of the suspect that comes first, null when it is this one or nobody leads.
 */
export function reasonsOf(
  timeline: Timeline,
  of: string,
  preference: Preference | undefined,
  measured: Measured,
  log: LogView,
  grade: Grade,
  leader: string | null,
): Reason[] {
  const reasons: Reason[] = []
  if (preference !== undefined) {
    reasons.push(preferenceReason(preference, grade, leader))
    const habit = habitReason(preference)
    if (habit !== null) reasons.push(habit)
  }
  const byLog = logReason(timeline, of, measured, log)
  if (byLog !== null) reasons.push(byLog)
  const rise = riseReason(of, measured)
  if (rise !== null) reasons.push(rise)
  const trigger = triggerReason(of, measured)
  if (trigger !== null) reasons.push(trigger)
  const noted = notedReason(timeline, of)
  if (noted !== null) reasons.push(noted)
  if (reasons.length === 1 && preference !== undefined) reasons.push(ratioReason(preference))
  return reasons.slice(0, MOST_REASONS)
}

function preferenceReason(p: Preference, grade: Grade, leader: string | null): Reason {
  const whole = Math.abs(p.inside - Math.round(p.inside)) < 0.05
  const inside = whole ? String(Math.round(p.inside)) : `about ${figure(p.inside)}`
  const fell = `${inside} of ${p.trips} trips fell ${p.window.words}`
  const chance = `${Number(p.expected.toPrecision(2))} would by chance`
  const text =
    p.window.key === 'any'
      ? 'It could act at any time, so only the course of the leakage before the trips speaks for or against it.'
      : p.inside <= p.expected
        ? `Only ${fell}; ${chance}.`
        : grade === 'cleared' && leader !== null
          ? `${sentence(fell)} and ${chance}, but ${leader} explains the same trips better.`
          : `${sentence(fell)}; ${chance} (${pValue(p.pFamily ?? p.pAdjusted)} after paying for all that was tried).`
  return {
    text,
    method: `exact conditional test of two Poisson rates (Przyborowski & Wilenski 1940), adjusted by ${p.pFamily === null ? 'Holm (1979)' : 'the best of all windows under circular shifts of the trips (Westfall & Young 1993), and by Holm (1979)'}`,
    figures: {
      tripsInside: rounded(p.inside),
      trips: p.trips,
      expectedInside: rounded(p.expected),
      hoursInside: rounded(p.window.insideHours),
      rateRatio: p.ratio !== null && Number.isFinite(p.ratio) ? rounded(p.ratio) : null,
      ratioLow: rounded(p.low),
      ratioHigh: Number.isFinite(p.high) ? rounded(p.high) : null,
      p: rounded(p.p),
      pAdjusted: rounded(p.pAdjusted),
      pFamily: p.pFamily === null ? null : rounded(p.pFamily),
      window: p.window.key,
      when: p.window.words,
    },
  }
}

function riseReason(of: string, measured: Measured): Reason | null {
  const profile = measured.profiles.get(of)
  if (profile === undefined || profile.riseMa === null || profile.runs < 2) return null
  const room =
    measured.headroom.standingMa === null ? null : measured.headroom.tripMa.value - measured.headroom.standingMa.p50
  const text =
    profile.riseMa < 0.1
      ? `Its ${profile.runs} runs leave no trace in the leakage log.`
      : `Over ${profile.runs} runs the leakage rises by up to ${current(profile.riseMa)} mA${room === null ? '' : `; the usual headroom is ${current(room)} mA`}.`
  return {
    text,
    method: 'level over that before each start, robust over runs (superposed epochs: Chree 1913)',
    figures: {
      runs: profile.runs,
      riseMa: rounded(profile.riseMa),
      usualHeadroomMa: room === null ? null : rounded(room),
    },
  }
}

function triggerReason(of: string, measured: Measured): Reason | null {
  const seen = measured.trips.filter((t) => t.trigger === of).length
  if (seen === 0) return null
  const judged = measured.trips.filter((t) => t.course !== 'unseen').length
  return {
    text: `At ${seen} of ${judged} trips that the log shows it had changed just before, in step with the leakage.`,
    method: 'course of the leakage before each trip',
    figures: { trips: seen, logged: judged },
  }
}

/** What people saw running: worth telling, and worth setting against how often it runs anyway. */
export function notedReason(timeline: Timeline, of: string): Reason | null {
  const noted = timeline.trips.filter((t) => t.running.includes(of)).length
  if (noted === 0) return null
  const asked = timeline.trips.filter((t) => t.running.length > 0).length
  const thing = timeline.things.find((t) => t.of === of)
  const known = thing === undefined ? 0 : (totalMs(thing.state.on) + totalMs(thing.state.off)) / HOUR_MS
  const runs = thing === undefined || known === 0 ? null : totalMs(thing.state.on) / HOUR_MS / known
  const usual = runs === null ? '' : ` By the log it runs ${Math.round(runs * 100)} % of the time anyway.`
  return {
    text: `Noted as running at ${noted} of ${asked} trips by whoever was there.${usual}`,
    method: 'note of the occupant, not used in the odds',
    figures: { noted, asked, runsShare: runs === null ? null : rounded(runs) },
  }
}
