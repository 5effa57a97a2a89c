import type { JSX } from 'preact'
import type { Findings } from '../../core/contract/findings.ts'
import type { Rcd, SiteOut } from '../../core/contract/site-sheet.ts'
import { rcdName } from '../format/names.ts'
import type { SiteClock } from '../format/site-clock.ts'
import { sheetAddress } from '../route/route.ts'
import { words } from '../words.ts'
import { DeviceRow } from './device-row.tsx'
import { missingOf } from './missing.ts'

interface WhoseDeviceProps {
  readonly site: SiteOut
  readonly rcd: Rcd
  readonly findings: Findings | null
  readonly lastReading: number | null
  readonly clock: SiteClock
  /** The address names a period of its own. */
  readonly period: boolean
}

/** Site, the board's devices to choose from, when the last reading came, what is missing. */
export function WhoseDevice({ site, rcd, findings, lastReading, clock, period }: WhoseDeviceProps): JSX.Element {
  const missing = missingOf(site, rcd, findings)
  return (
    <header class="whose">
      <h1>{site.name}</h1>
      {site.rcds.length > 1 ? (
        <DeviceRow site={site.id} rcds={site.rcds} chosen={rcd.ref} />
      ) : (
        <p class="single-device">
          {rcdName(rcd)}: {words.whose.rated(rcd.ratedMa, rcd.type, rcd.delay)}
        </p>
      )}
      <p class="aside">
        {findings !== null && (
          <>
            {lastReading === null ? words.whose.lastNone : words.whose.last(clock.moment(lastReading))}.{' '}
            {words.whose.period(clock.span(Date.parse(findings.from), Date.parse(findings.to)))}
            {period && (
              <>
                {' '}
                (<a href={sheetAddress(site.id, rcd.ref)}>{words.strip.whole}</a>)
              </>
            )}
            .{' '}
          </>
        )}
        {words.whose.zone(site.timeZone)}
      </p>
      {findings !== null && missing.length > 0 && (
        <details class="missing">
          <summary>
            {words.whose.missing} ({missing.length})
          </summary>
          <ul>
            {missing.map((text) => (
              <li key={text}>{text}</li>
            ))}
          </ul>
        </details>
      )}
    </header>
  )
}
