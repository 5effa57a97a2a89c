import { z } from 'zod'
import { InstantOut, Label } from './primitives.ts'

/** owner does everything; logger only posts to its site; viewer only reads its site; occupant only reports trips of its site. */
export const KeyRole = z.enum(['owner', 'logger', 'viewer', 'occupant'])
export const SiteKeyRole = z.enum(['logger', 'viewer', 'occupant'])
export const KeyIn = z.object({ role: SiteKeyRole, label: Label.min(1) })
export const KeyMade = z.object({
  id: z.string(),
  key: z.string().meta({ description: 'shown this once' }),
  role: SiteKeyRole,
  label: z.string(),
})
export const KeyOut = z.object({
  id: z.string(),
  role: SiteKeyRole,
  label: z.string(),
  createdAt: InstantOut,
  lastUsedAt: InstantOut.nullable(),
  endedAt: InstantOut.nullable(),
})
/** Signing the page in with a key. */
export const SignIn = z.object({ key: z.string().min(1).max(200) })
/** Who the caller is. */
export const Whoami = z.object({
  role: KeyRole,
  site: z.string().nullable(),
  label: z.string(),
  rcds: z
    .array(z.object({ ref: z.string(), label: z.string().optional() }))
    .optional()
    .meta({ description: 'occupant keys only: the devices a trip can be reported of' }),
})

export type KeyRole = z.infer<typeof KeyRole>
export type SiteKeyRole = z.infer<typeof SiteKeyRole>
export type KeyOut = z.infer<typeof KeyOut>
export type Whoami = z.infer<typeof Whoami>
