import type { AlertSettings, SiteSheet } from '../../core/contract/index.ts'
import type { Noticed, OpenMatter } from './notice.ts'
import { milliamps, rcdName } from './words.ts'

/** The recent level of a device beside the current at which it opens. */
export interface DeviceLevel {
  readonly rcd: string
  /** Median of the last minutes, mA. */
  readonly levelMa: number
  readonly tripMa: number
  readonly basis: string
}

const BASIS: Readonly<Record<string, string>> = {
  'ramp-tests': 'by ramp test',
  'levels-at-trips': 'by the levels at which it tripped',
  limits: 'by the limits of its standard; no ramp test is known',
}

/** Levels near the trip current; one that is told counts as over only well below. */
export function noticeLevels(
  sheet: SiteSheet,
  levels: readonly DeviceLevel[],
  { share, hysteresis }: AlertSettings['level'],
  open: readonly OpenMatter[],
): Noticed {
  const notices = levels
    .filter(({ levelMa, tripMa }) => levelMa >= share * tripMa)
    .map(({ rcd, levelMa, tripMa, basis }) => ({
      key: `level/${rcd}`,
      kind: 'level' as const,
      text:
        `The leakage of ${rcdName(sheet, rcd)} is ${milliamps(levelMa)}. It opens at about ${milliamps(tripMa)} ` +
        `(${BASIS[basis] ?? basis}), so ${Math.round((100 * levelMa) / tripMa)} % are used up.`,
      figures: { rcd, levelMa, tripMa, basis },
    }))
  const low = new Set(
    levels.filter(({ levelMa, tripMa }) => levelMa < (share - hysteresis) * tripMa).map(({ rcd }) => `level/${rcd}`),
  )
  const gone = (key: string): boolean => !sheet.rcds.some(({ ref }) => key === `level/${ref}`)
  const over = open.filter(({ kind, key }) => kind === 'level' && (low.has(key) || gone(key)))
  return { notices, over: over.map(({ key }) => key) }
}
