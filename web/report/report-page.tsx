import type { JSX } from 'preact'
import { useRef, useState } from 'preact/hooks'
import type { Whoami } from '../../core/contract/keys.ts'
import { CallError, call } from '../api/call.ts'
import { apiPath } from '../api/paths.ts'
import { LOCALE } from '../format/numbers.ts'
import { words } from '../words.ts'
import { fromField, toField } from './time-field.ts'

/** What is posted: the shape of the contract with instants as epoch ms. */
interface TripBody {
  readonly rcd: string
  readonly at?: number
  readonly after?: number
  readonly before?: number
  readonly note?: string
}

interface ReportProps {
  readonly who: Whoami
  /** The device, when the link names it. */
  readonly rcd: string | null
}

const HOUR = 3_600_000

/** The occupant's page: one large button, when it was noticed, an optional note. Nothing else of the site is shown. */
export function ReportPage({ who, rcd }: ReportProps): JSX.Element {
  const devices = who.rcds ?? []
  const [device, setDevice] = useState(rcd ?? (devices.length === 1 ? devices[0]!.ref : ''))
  const [found, setFound] = useState(false)
  const [lastOn, setLastOn] = useState(() => toField(Date.now() - 8 * HOUR))
  const [foundAt, setFoundAt] = useState(() => toField(Date.now()))
  const [note, setNote] = useState('')
  const [state, setState] = useState<'open' | 'busy' | 'done'>('open')
  const [trouble, setTrouble] = useState<string | null>(null)
  const [sent, setSent] = useState<TripBody | null>(null)
  // The moment of the first press counts, also when sending it takes several tries: the same body twice is one trip.
  const pressed = useRef<number | null>(null)

  const send = async (event: Event): Promise<void> => {
    event.preventDefault()
    if (device.trim() === '') return setTrouble(words.report.unknown)
    pressed.current ??= Date.now()
    const after = fromField(lastOn)
    const before = fromField(foundAt)
    if (found && !(after !== null && before !== null && after < before)) return setTrouble(words.report.order)
    const time = found ? { after: after!, before: before! } : { at: pressed.current }
    const body: TripBody = { rcd: device.trim(), ...time, ...(note.trim() === '' ? {} : { note: note.trim() }) }
    setState('busy')
    setTrouble(null)
    try {
      await call(apiPath(['sites', who.site ?? '', 'trips']), { method: 'POST', body })
      setSent(body)
      setState('done')
    } catch (error) {
      setState('open')
      const answered = error instanceof CallError && error.status > 0
      setTrouble(answered ? `${words.report.refused} ${error.message}` : words.report.kept)
    }
  }
  const another = (): void => {
    pressed.current = null
    setNote('')
    setFoundAt(toField(Date.now()))
    setState('open')
  }

  if (state === 'done' && sent !== null) {
    return (
      <main id="main" class="report">
        <h1>{words.report.done}</h1>
        <p role="status">{saidOf(sent)}</p>
        <button type="button" onClick={another}>
          {words.report.another}
        </button>
      </main>
    )
  }
  return (
    <main id="main" class="report">
      <form onSubmit={send}>
        <h1>{words.report.heading}</h1>
        <DeviceChoice
          devices={devices}
          fixed={rcd !== null || devices.length === 1}
          value={device}
          onChange={setDevice}
        />
        <fieldset>
          <legend>{words.report.when}</legend>
          <label class="choice">
            <input type="radio" name="when" checked={!found} onChange={() => setFound(false)} />
            {words.report.now}
          </label>
          <label class="choice">
            <input type="radio" name="when" checked={found} onChange={() => setFound(true)} />
            {words.report.found}
          </label>
          {found && (
            <div class="pair">
              <label for="last-on">{words.report.lastOn}</label>
              <input
                id="last-on"
                type="datetime-local"
                required
                value={lastOn}
                onInput={(e) => setLastOn(e.currentTarget.value)}
              />
              <label for="found-at">{words.report.foundAt}</label>
              <input
                id="found-at"
                type="datetime-local"
                required
                value={foundAt}
                onInput={(e) => setFoundAt(e.currentTarget.value)}
              />
              <p class="aside">{words.report.clock}</p>
            </div>
          )}
        </fieldset>
        <label for="note">{words.report.note}</label>
        <textarea id="note" rows={3} maxLength={2000} value={note} onInput={(e) => setNote(e.currentTarget.value)} />
        {trouble && (
          <p class="trouble" role="alert">
            {trouble}
          </p>
        )}
        <button type="submit" class="big-button" disabled={state === 'busy'}>
          {state === 'busy' ? words.report.busy : words.report.button}
        </button>
      </form>
    </main>
  )
}

interface DeviceChoiceProps {
  readonly devices: readonly { readonly ref: string; readonly label?: string | undefined }[]
  readonly fixed: boolean
  readonly value: string
  readonly onChange: (ref: string) => void
}

/** Which device it was: known from the link or key, one of a few, or typed. */
function DeviceChoice({ devices, fixed, value, onChange }: DeviceChoiceProps): JSX.Element | null {
  if (fixed) return null
  if (devices.length === 0) {
    return (
      <p class="pair">
        <label for="device">{words.report.which}</label>
        <input
          id="device"
          type="text"
          required
          maxLength={40}
          aria-describedby="device-help"
          value={value}
          onInput={(e) => onChange(e.currentTarget.value)}
        />
        <span id="device-help" class="aside">
          {words.report.whichHelp}
        </span>
      </p>
    )
  }
  return (
    <fieldset>
      <legend>{words.report.which}</legend>
      {devices.map((one) => (
        <label class="choice" key={one.ref}>
          <input type="radio" name="device" required checked={one.ref === value} onChange={() => onChange(one.ref)} />
          {one.label ?? words.names.rcd(one.ref)}
        </label>
      ))}
    </fieldset>
  )
}

function saidOf(body: TripBody): string {
  const when = new Intl.DateTimeFormat(LOCALE, {
    weekday: 'short',
    day: 'numeric',
    month: 'short',
    hour: '2-digit',
    minute: '2-digit',
  })
  if (body.at !== undefined) return words.report.doneAt(when.format(body.at))
  return words.report.doneBetween(when.format(body.after), when.format(body.before))
}
