import type { JSX } from 'preact'
import type { Rcd } from '../../core/contract/site-sheet.ts'
import { rcdName } from '../format/names.ts'
import { Link } from '../route/link.tsx'
import { sheetAddress } from '../route/route.ts'
import { words } from '../words.ts'

interface DeviceRowProps {
  readonly site: string
  readonly rcds: readonly Rcd[]
  readonly chosen: string
}

/** The board's RCDs as they sit on the rail: body, lever, test button, ways behind them. */
export function DeviceRow({ site, rcds, chosen }: DeviceRowProps): JSX.Element {
  return (
    <nav class="rail" aria-label={words.whose.choose}>
      <ul>
        {rcds.map((rcd) => (
          <li key={rcd.ref}>
            <Link to={sheetAddress(site, rcd.ref)} class="device" current={rcd.ref === chosen}>
              <Drawn circuits={rcd.circuits.length} />
              <span class="device-text">
                <span class="device-name">{rcdName(rcd)}</span>
                <span class="device-rating">{words.whose.rated(rcd.ratedMa, rcd.type, rcd.delay)}</span>
                <span class="device-rating">{words.whose.circuits(rcd.circuits.length)}</span>
              </span>
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  )
}

/** A two-module device and a thin breaker for each of its circuits (at most eight are drawn). */
function Drawn({ circuits }: { circuits: number }): JSX.Element {
  const ways = Math.min(circuits, 8)
  return (
    <svg class="drawn" viewBox={`0 0 ${42 + ways * 11} 56`} height="56" aria-hidden="true" focusable="false">
      <rect x="1" y="1" width="36" height="54" rx="2" class="drawn-body" />
      <rect x="6" y="16" width="26" height="22" rx="1" class="drawn-window" />
      <rect x="10" y="19" width="10" height="16" rx="1" class="drawn-lever" />
      <circle cx="27" cy="24" r="3.2" class="drawn-test" />
      {Array.from({ length: ways }, (_, i) => (
        <g key={i} transform={`translate(${41 + i * 11} 0)`}>
          <rect x="0" y="6" width="9" height="44" rx="1" class="drawn-body" />
          <rect x="2.5" y="20" width="4" height="12" class="drawn-lever" />
        </g>
      ))}
    </svg>
  )
}
