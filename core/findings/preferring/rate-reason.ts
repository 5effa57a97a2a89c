import type { Reason } from '../../contract/findings.ts'
import { poissonRate } from '../../statistics/poisson-rate.ts'
import { countOf, duration, figure, rounded, sentence } from '../words.ts'

const WEEK_H = 168
const CONFIDENCE = 0.9

/** How well the rate of trips is known, whatever is behind them: Garwood's exact limits, a week. */
export function rateReason(trips: number, hours: number): Reason {
  const method = 'exact 90 % limits of a Poisson rate (Garwood 1936)'
  if (!(hours > 0)) {
    return { text: 'No time under supply is known yet.', method, figures: { trips, energisedHours: 0 } }
  }
  const { low, high } = poissonRate(trips, hours, { confidence: CONFIDENCE })
  const seen = `${sentence(countOf(trips, 'trip'))} in ${duration(hours)} under supply`
  const text =
    trips === 0
      ? `${seen} leave room for up to ${figure(high * WEEK_H)} a week.`
      : `${seen} go with anything from ${figure(low * WEEK_H)} to ${figure(high * WEEK_H)} a week in the long run.`
  return {
    text,
    method,
    figures: {
      trips,
      energisedHours: rounded(hours),
      lowAWeek: rounded(low * WEEK_H),
      highAWeek: rounded(high * WEEK_H),
    },
  }
}

/** Why a thing that nothing is known of has the probability it has. */
export function priorReason(probability: number): Reason {
  return {
    text: `Nothing speaks for or against it: its probability of ${probability.toFixed(2)} is what anything of its kind has before it was looked at, as far as nothing else explains the trips.`,
    method: 'prior probability, times that of no other cause',
    figures: { probability: rounded(probability) },
  }
}
