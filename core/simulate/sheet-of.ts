import { type Channel, SiteSheet } from '../contract/site-sheet.ts'
import type { Installation, Logger } from './installation.ts'

/** The sheet that an electrician would write of an installation: what is listed, and the channels of its logger. */
export function sheetOf(
  installation: Installation,
  logger: Logger | null,
  rampTripMa: Readonly<Record<string, number>> = {},
): SiteSheet {
  const channels: Channel[] = []
  if (logger) {
    for (const rcd of installation.rcds) {
      channels.push({
        ref: leakageChannel(rcd.ref),
        quantity: 'leakage',
        rcd: rcd.ref,
        accuracy: { ...logger.accuracy },
        resolutionMa: logger.resolutionMa,
      })
      if (logger.loadCurrent) channels.push({ ref: ampsChannel(rcd.ref), quantity: 'load-current', rcd: rcd.ref })
      for (const load of rcd.circuits.flatMap((circuit) => circuit.loads)) {
        if (load.listed && load.monitored) {
          channels.push({ ref: stateChannel(load.ref), quantity: 'running', load: load.ref })
        }
      }
    }
    if (logger.weather) {
      channels.push({ ref: 'rain', quantity: 'rain' }, { ref: 'outdoor', quantity: 'temperature' })
      channels.push({ ref: 'rh', quantity: 'humidity' })
    }
  }
  return SiteSheet.parse({
    name: installation.name,
    timeZone: installation.timeZone,
    latitude: installation.latitude,
    longitude: installation.longitude,
    supply: { volts: 230, hertz: 50, earthing: 'TN-C-S' },
    rcds: installation.rcds.map((rcd) => ({
      ref: rcd.ref,
      ...named(rcd.label),
      ratedMa: rcd.ratedMa,
      ...(rampTripMa[rcd.ref] === undefined ? {} : { rampTripMa: rampTripMa[rcd.ref] }),
      circuits: rcd.circuits.map((circuit) => ({
        ref: circuit.ref,
        ...named(circuit.label),
        ...(circuit.device === undefined ? {} : { device: circuit.device }),
        isolation: circuit.isolation,
        loads: circuit.loads.filter((load) => load.listed).map((load) => ({ ref: load.ref, ...named(load.label) })),
      })),
    })),
    channels,
  })
}

/** The channel of a device's residual current: `tails-a` for A. */
export function leakageChannel(rcd: string): string {
  return `tails-${rcd.toLowerCase()}`
}

/** The channel of a device's load current. */
export function ampsChannel(rcd: string): string {
  return `amps-${rcd.toLowerCase()}`
}

/** The channel that says when a load runs. */
export function stateChannel(load: string): string {
  return `${load}-runs`
}

function named(label: string | undefined): { label?: string } {
  return label === undefined ? {} : { label }
}
