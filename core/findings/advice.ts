import type { Grade } from '../contract/findings.ts'
import type { Timeline } from '../timeline/timeline.ts'
import { nameOf } from './words.ts'

/** What would settle the question of one suspect, as a sentence for the site. */
export function nextFor(timeline: Timeline, of: string, grade: Grade, same: readonly string[]): string {
  const name = nameOf(timeline, of)
  if (same.length > 0) {
    return `Switch ${name} and ${same.map((s) => nameOf(timeline, s)).join(', ')} at different times for some days: they were always on together.`
  }
  if (grade === 'cleared') return 'Nothing; look elsewhere first.'
  const thing = timeline.things.find((t) => t.of === of)
  if (thing?.kind === 'load')
    return `Unplug ${name} for some days and see whether the trips stop; test its insulation at the plug.`
  if (thing?.kind === 'circuit')
    return `Isolate ${name} in both poles for some days; test its insulation with the loads unplugged.`
  return NEXT[of] ?? ''
}

const NEXT: Readonly<Record<string, string>> = {
  rain: 'Isolate the outdoor circuits in both poles in the next wet spell; open outdoor accessories and look for water.',
  temperature: 'Look for heaters with a thermostat and for frost protection; note what runs at such temperatures.',
  clock: 'Look for a timer, an off-peak heater or a defrost clock that switches at this time.',
  period: 'Look for an appliance with a cycle of this length: defrost, softener, pump.',
  sun: 'Look for lights on a photocell; isolate them for some evenings.',
  'load-current':
    'Test neutral to earth with the neutrals out of the bar; switching off the breaker alone changes nothing.',
  standing: 'Spread the circuits over more devices, or take the largest contributors off this one.',
  supply: 'Ask the network operator for events at these times; look at surge protection and earthing.',
  device:
    'Repeat the ramp test with all circuits disconnected; a device that opens below half its rating is to be replaced.',
  unlisted: 'Walk the site for what is not on the sheet; clamp circuit by circuit while the level is up.',
}
