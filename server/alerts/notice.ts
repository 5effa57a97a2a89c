import type { MatterKind } from '../../core/contract/index.ts'

/** Something worth telling, as it stands now. */
export interface Notice {
  /** The same matter has the same key, however often it is looked at. */
  readonly key: string
  readonly kind: MatterKind
  readonly text: string
  readonly figures: Readonly<Record<string, unknown>>
}

/** What looking at one question found. */
export interface Noticed {
  readonly notices: readonly Notice[]
  /** Keys of open matters that are over. */
  readonly over: readonly string[]
}

/** An open matter, as far as looking needs it. */
export interface OpenMatter {
  readonly key: string
  readonly kind: MatterKind
  readonly closedAt: number | null
  readonly figures: Readonly<Record<string, unknown>>
}
