import type { NextStep } from '../../contract/findings.ts'
import { type GammaBelief, JEFFREYS } from '../../statistics/gamma-poisson.ts'
import type { Thing, Timeline } from '../../timeline/timeline.ts'
import { countOf, figure, nameOf } from '../words.ts'
import type { Proposal } from './best-isolations.ts'
import { SETTLED } from './trial.ts'

/** A proposal in words: how, how long, what it settles and with what odds, and what the breaker alone would leave. */
export function isolationStep(timeline: Timeline, proposal: Proposal, belief: GammaBelief): NextStep {
  const { isolation, days, trial, byBreaker, prior } = proposal
  const things = isolation.of.map((of) => timeline.things.find((t) => t.of === of)!)
  const step: NextStep = {
    isolate: isolation.of.join(' + '),
    days,
    settles: Number(trial.settles.toFixed(3)),
    text: [how(timeline, things, byBreaker !== null), what(proposal, things, belief), neutral(proposal)]
      .filter((text) => text !== '')
      .join(' '),
    bits: Number(trial.bits.toFixed(4)),
  }
  if (byBreaker !== null && prior > 0) step.settlesByBreaker = Number(byBreaker.settles.toFixed(3))
  return step
}

function how(timeline: Timeline, things: readonly Thing[], opensLineOnly: boolean): string {
  const names = listed(things.map((thing) => nameOf(timeline, thing.of)))
  if (things[0]?.kind === 'load') return `Unplug ${names} (or open both its poles)`
  return opensLineOnly ? `Isolate ${names} in both poles` : `Switch off ${names}`
}

function what({ days, trial, prior }: Proposal, things: readonly Thing[], belief: GammaBelief): string {
  const which = things.length === 1 ? 'it has' : 'one of them has'
  const weekly = ((belief.shape - JEFFREYS.shape) / belief.rate) * 168
  const settled = `whether ${which} a part in the trips`
  const settles =
    prior >= SETTLED
      ? `that puts it to the proof, with odds of ${odds(trial.settles)} of a clear answer`
      : trial.settles >= SETTLED
        ? `with odds of ${odds(trial.settles)} that settles ${settled}`
        : `that settles ${settled} with odds of only ${odds(trial.settles)}`
  const after =
    prior >= SETTLED
      ? `A trip on the first day would bring its probability from ${odds(prior)} down to ${odds(trial.ifTrip)}.`
      : `Quiet throughout would make that ${odds(trial.ifQuiet)} (now ${odds(prior)}), a trip on the first day ${odds(trial.ifTrip)}.`
  const chance = `At ${figure(weekly)} trips a week so long a quiet spell comes by chance once in ${figure(1 / trial.quietByChance)} times.`
  return `for ${countOf(days, 'day')}: ${settles}. ${after} ${chance}`
}

/** What opening the line alone leaves open. */
function neutral({ trial, byBreaker }: Proposal): string {
  if (byBreaker === null) return ''
  return `The breaker opens the line only and leaves what leaks from the neutral: by it alone the odds of settling are ${odds(byBreaker.settles)}, a quiet spell proves ${odds(byBreaker.ifQuiet)} instead of ${odds(trial.ifQuiet)}, and a trip leaves ${odds(byBreaker.ifTrip)} instead of ${odds(trial.ifTrip)}.`
}

function odds(p: number): string {
  return p > 0.995 ? 'over 0.99' : p < 0.005 ? 'below 0.01' : p.toFixed(2)
}

function listed(names: readonly string[]): string {
  const last = names.at(-1) ?? ''
  return names.length < 2 ? last : `${names.slice(0, -1).join(', ')} and ${last}`
}
