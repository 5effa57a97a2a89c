import { createHash } from 'node:crypto'
import type { RecordKind } from '../../core/contract/index.ts'
import { check } from '../intake/check.ts'
import { takeColumns } from '../intake/columns.ts'
import { takeIn } from '../intake/door.ts'
import { takeRecords } from '../intake/records.ts'
import { Refused } from '../intake/refused.ts'
import { takeSenml } from '../intake/senml.ts'
import { readSenmlCbor } from '../intake/senml-cbor.ts'
import { hasRelativeTimes, SenmlPack } from '../intake/senml-record.ts'
import type { Taken } from '../intake/taken.ts'
import { type SiteRecord, type Store, StoreError } from '../store/port.ts'
import type { TopicRight } from './rights.ts'

/** What messages are put into, and who is told of it. */
export interface Inlet {
  readonly store: Pick<Store, 'site' | 'append' | 'keep' | 'messages'>
  readonly now: () => number
  readonly onReadings: (site: string, taken: Taken) => void
  readonly onRecords: (site: string, kind: RecordKind) => void
  /** Something went wrong that is no fault of the message. */
  readonly onFault: (error: unknown) => void
}

export interface Message {
  readonly topic: string
  readonly payload: Uint8Array
  /** The broker delivers it once more. */
  readonly again: boolean
  /** The broker kept it for whoever comes later. */
  readonly retained: boolean
}

/** The largest message that is read. */
export const MAX_MESSAGE_BYTES: number = 4 * 1024 * 1024
const SAMPLE_CHARACTERS = 200

/**
 * Puts one message where its topic may put it. Resolves when it is durable, or its refusal is: either way it need not
 * come again. A message of a site that does not exist goes `nowhere`.
 * @throws {StoreError} when nothing could be kept: the message has to come again
 */
export async function takeMessage(
  inlet: Inlet,
  right: TopicRight,
  message: Message,
): Promise<'taken' | 'refused' | 'nowhere'> {
  const site = await inlet.store.site(right.site)
  if (site === undefined) return 'nowhere'
  try {
    const left = await (right.kind === 'readings'
      ? takeReadings(inlet, site, message)
      : takeOthers(inlet, site, right.kind, message))
    if (left === undefined) return 'taken'
    await refuse(inlet, site, message, left)
    return 'taken'
  } catch (error) {
    if (error instanceof StoreError) throw error
    if (!(error instanceof Refused)) {
      // Coming again it would fail again, and hold up all that follow.
      inlet.onFault(error)
      await refuse(inlet, site, message, 'Something went wrong in the server; its log says what.')
      return 'refused'
    }
    const [first] = error.issues
    await refuse(inlet, site, message, first ? `${error.message} ${first.path}: ${first.why}` : error.message)
    return 'refused'
  }
}

/** Resolves with what of it was left out, in words. */
async function takeReadings(inlet: Inlet, { id, sheet }: SiteRecord, message: Message): Promise<string | undefined> {
  const body = bodyOf(message.payload)
  const pack = Array.isArray(body)
  const taken = pack ? takeSenml(body, sheet, await arrivalOf(inlet, body, message)) : takeColumns(body, sheet)
  const place = pack
    ? (_block: number, index: number, column: string) => `/${index}/${column}`
    : (block: number, index: number, column: string) => `/blocks/${block}/${column}/${index}`
  const answer = await takeIn(inlet.store, id, taken, place, { replace: false })
  inlet.onReadings(id, taken)
  if (answer.refusedCount > 0) return `Some readings were refused; the first because ${answer.refused[0]?.why}`
  return answer.conflicting > 0 ? 'Some readings were there already with another value, which stayed.' : undefined
}

async function takeOthers(
  inlet: Inlet,
  { id, sheet }: SiteRecord,
  kind: 'trips' | 'states',
  { payload }: Message,
): Promise<undefined> {
  const record = kind === 'trips' ? 'trip' : 'switching'
  const bodies = takeRecords(record, bodyOf(payload), sheet)
  const { stored } = await inlet.store.keep(id, record, bodies, { by: 'MQTT', at: inlet.now() })
  if (stored > 0) inlet.onRecords(id, record)
  return undefined
}

/** JSON where the first byte that is no white space begins an object or a list, else CBOR. */
function bodyOf(payload: Uint8Array): unknown {
  if (payload.length > MAX_MESSAGE_BYTES) {
    throw new Refused(`A message may have ${MAX_MESSAGE_BYTES} bytes, this one has ${payload.length}.`)
  }
  if (payload.length === 0) throw new Refused('The message is empty.')
  const first = payload.find((byte) => byte !== 0x20 && byte !== 0x09 && byte !== 0x0a && byte !== 0x0d)
  if (first !== 0x7b && first !== 0x5b) {
    // Arrays, with or without a length, and the mark of CBOR itself.
    if (first !== undefined && ((first >= 0x80 && first <= 0x9f) || first === 0xd9)) return readSenmlCbor(payload)
    throw new Refused('The message is neither a JSON object or list nor a SenML pack in CBOR.')
  }
  try {
    return JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(payload))
  } catch (error) {
    if (!(error instanceof SyntaxError) && !(error instanceof TypeError)) throw error
    throw new Refused('The message is not valid JSON.')
  }
}

/**
 * What relative times of a pack count from. Delivered again they still mean the moment the message came first, so that
 * a lost acknowledgement doubles nothing.
 */
async function arrivalOf({ store, now }: Inlet, body: unknown, message: Message): Promise<number> {
  if (!hasRelativeTimes(check(SenmlPack, body))) return now()
  if (message.retained) throw new Refused('A retained message whose times count from now says nothing: give the time.')
  const digest = createHash('sha256').update(message.topic).update('\0').update(message.payload).digest()
  return store.messages.arrivedAt(digest, now(), message.again)
}

async function refuse({ store, now }: Inlet, { id }: SiteRecord, message: Message, why: string): Promise<void> {
  const text = Buffer.from(message.payload.subarray(0, SAMPLE_CHARACTERS * 4)).toString('utf8')
  await store.messages.refuse(id, {
    topic: message.topic,
    why: why.slice(0, 500),
    at: now(),
    bytes: message.payload.length,
    sample: [...text].slice(0, SAMPLE_CHARACTERS).join(''),
  })
}
