import type { Rcd, SiteOut } from '../../core/contract/site-sheet.ts'
import { words } from '../words.ts'

/** What people call a device: its label, else `RCD A`. */
export function rcdName(rcd: Pick<Rcd, 'ref' | 'label'>): string {
  return rcd.label ? rcd.label : words.names.rcd(rcd.ref)
}

/** Names of all subjects of a sheet by `circuit:REF` and `load:REF`. */
export function namesOf(site: Pick<SiteOut, 'rcds'>): (of: string) => string {
  const names = new Map<string, string>()
  for (const rcd of site.rcds) {
    for (const circuit of rcd.circuits) {
      names.set(
        `circuit:${circuit.ref}`,
        circuit.label ? words.names.way(circuit.label, circuit.ref) : words.names.circuit(circuit.ref),
      )
      for (const load of circuit.loads) names.set(`load:${load.ref}`, load.label || load.ref)
    }
  }
  return (of) => names.get(of) ?? words.names.cause[of] ?? of.replace(/^(circuit|load):/, '')
}
