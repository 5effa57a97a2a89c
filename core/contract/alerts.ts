import { z } from 'zod'
import { InstantOut, Ref } from './primitives.ts'

/** What can be told: a logger that stopped, a trip, a level near the trip current, a remedy that is proven. */
export const MatterKind = z.enum(['silence', 'trip', 'level', 'remedy', 'test'])

/** A mailbox in the plain form name@host: no display name, no comment, no quoting. */
const Mailbox = z
  .string()
  .max(254)
  .regex(/^[A-Za-z0-9!#$%&'*+/=?^_`{|}~-]+(\.[A-Za-z0-9!#$%&'*+/=?^_`{|}~-]+)*@[A-Za-z0-9-]+(\.[A-Za-z0-9-]+)*$/, {
    error: 'a mailbox as name@host',
  })

const LocalTime = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$/, 'a local time as HH:MM')

/** Printable, and without name and password; the server reads it again as a URL. */
const WebhookUrl = z
  .string()
  .max(2_000)
  .regex(
    /^https?:\/\/[!"$-.0-;=A-Z[\]^-~]+([/?#][!-~]*)?$/i,
    'an http or https address without name and password in it',
  )

const fields = {
  email: z
    .object({ to: z.array(Mailbox).min(1).max(10) })
    .nullable()
    .default(null)
    .meta({ description: 'who gets mail; null: nobody' }),
  about: z
    .object({
      silence: z.boolean().default(true),
      trip: z.boolean().default(true),
      level: z.boolean().default(true),
      remedy: z.boolean().default(true),
    })
    .prefault({})
    .meta({ description: 'which matters are told; all are noticed' }),
  quiet: z
    .object({
      from: LocalTime,
      to: LocalTime,
      tripsBreakThrough: z.boolean().default(false).meta({ description: 'a trip is told at once all the same' }),
    })
    .nullable()
    .default(null)
    .meta({ description: "hours of the site's own clock in which messages wait; may run past midnight" }),
  silence: z
    .object({
      leastSeconds: z
        .number()
        .min(0)
        .max(604_800)
        .default(30)
        .meta({ description: 'a silence shorter than this is not noticed' }),
      everySeconds: z
        .record(Ref, z.number().positive().max(2_678_400).nullable())
        .default({})
        .meta({ description: 'how often a channel posts, where it cannot be learned; null: do not watch it' }),
    })
    .prefault({}),
  level: z
    .object({
      share: z
        .number()
        .min(0.1)
        .max(1)
        .default(0.8)
        .meta({ description: 'of the trip current: a level at or above it is told' }),
      hysteresis: z
        .number()
        .min(0)
        .max(0.5)
        .default(0.1)
        .meta({ description: 'it counts as over only this share further down' }),
    })
    .prefault({}),
} as const

const Secret = z
  .string()
  .regex(/^[\x21-\x7e]{16,200}$/, '16 to 200 printable characters without spaces')
  .meta({ description: 'signs every call; kept, never shown. Left out: the one set before stays' })

/** What a site wants to be told, and how. */
export const AlertSettingsIn = z.object({
  ...fields,
  webhook: z
    .object({ url: WebhookUrl, secret: Secret.optional() })
    .nullable()
    .default(null)
    .meta({ description: 'where messages are posted as JSON, signed by HMAC-SHA256; null: nowhere' }),
})

export const AlertSettingsOut = z.object({
  ...fields,
  webhook: z.object({ url: z.string(), hasSecret: z.boolean() }).nullable(),
  emailReady: z.boolean().meta({ description: 'whether the server has a mail relay to send by' }),
})

/** The settings as they are kept: without the secret. */
export const AlertSettings = z.object({ ...fields, webhook: z.object({ url: z.string() }).nullable().default(null) })

const Delivery = z.object({
  way: z.enum(['email', 'webhook']),
  state: z.enum(['waiting', 'sent', 'given-up']),
  attempts: z.int(),
  at: InstantOut.nullable().meta({ description: 'of the last attempt' }),
})

export const MatterOut = z.object({
  id: z.string(),
  kind: MatterKind,
  text: z.string(),
  openedAt: InstantOut,
  closedAt: InstantOut.nullable().meta({ description: 'null while it lasts' }),
  figures: z.record(z.string(), z.unknown()),
  deliveries: z.array(Delivery).meta({ description: 'who was told; empty where nobody is' }),
})

export const DeliveryOut = Delivery.extend({
  message: z.string().meta({ description: 'id that the receiver saw, the same on every attempt' }),
  kind: MatterKind,
  target: z.string(),
  createdAt: InstantOut,
  nextAt: InstantOut.nullable().meta({ description: 'of the next attempt, where one is due' }),
  error: z.string().nullable(),
  matters: z.array(z.string()),
})

export type MatterKind = z.infer<typeof MatterKind>
export type AlertSettings = z.infer<typeof AlertSettings>
export type AlertSettingsIn = z.infer<typeof AlertSettingsIn>
export type AlertSettingsOut = z.infer<typeof AlertSettingsOut>
export type MatterOut = z.infer<typeof MatterOut>
export type DeliveryOut = z.infer<typeof DeliveryOut>

/** The settings of a site that never made any: everything is noticed, nobody is told. */
export const NO_ALERTS: AlertSettings = AlertSettings.parse({})
