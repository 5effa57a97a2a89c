import type { Finding, SiteSheet } from '../../core/contract/index.ts'
import type { Noticed, OpenMatter } from './notice.ts'
import { rcdName } from './words.ts'

/** The proof of the last remedy of a device. */
export interface DeviceProof {
  readonly rcd: string
  readonly proof: Finding.Proof
}

const PROVEN = 0.95
/** Below this a remedy that was told as proven counts as not proven after all. */
const LOST = 0.5

/** Remedies that have become proven. */
export function noticeRemedies(sheet: SiteSheet, proofs: readonly DeviceProof[], open: readonly OpenMatter[]): Noticed {
  const sure = ({ proof }: DeviceProof): number => proof.confidenceFixed ?? 0
  const keyOf = ({ rcd, proof }: DeviceProof): string => `remedy/${rcd}/${proof.remedyAt}`
  const notices = proofs
    .filter((one) => one.proof.remedyAt !== null && sure(one) >= PROVEN)
    .map((one) => ({
      key: keyOf(one),
      kind: 'remedy' as const,
      text: `${rcdName(sheet, one.rcd)}: the remedy is proven, ${Math.round(100 * sure(one))} % sure. ${one.proof.text}`,
      figures: {
        rcd: one.rcd,
        remedyAt: one.proof.remedyAt,
        confidenceFixed: sure(one),
        quietHours: one.proof.quietHours,
      },
    }))
  const lost = new Set(proofs.filter((one) => sure(one) < LOST).map(keyOf))
  return { notices, over: open.filter(({ kind, key }) => kind === 'remedy' && lost.has(key)).map(({ key }) => key) }
}
