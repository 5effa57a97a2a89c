import { useEffect, useRef, useState } from 'preact/hooks'
import { listenLive } from '../api/live.ts'
import { throttle } from './throttle.ts'

/** What live news set going: a number rises when its part is to be fetched anew. */
export interface Live {
  readonly up: boolean
  readonly readings: number
  readonly findings: number
  readonly records: number
  readonly matters: number
  /** Time of the latest reading that came of the shown leakage channel, epoch ms; null before any. */
  readonly latest: number | null
}

export interface LiveInput {
  readonly site: string
  /** The leakage channel of the strip. */
  readonly channel: string | null
  /** Whether a channel's readings show anywhere on the sheet. */
  readonly shows: (channel: string) => boolean
  readonly onSheet: () => void
}

/** The trace follows readings within a second, findings at most every ten; records ask for both soon. */
const TRACE_EVERY = 1_000
const FINDINGS_EVERY = 10_000
const RECORDS_AFTER = 1_000

/** Follows the live stream of a site. */
export function useLive(input: LiveInput): Live {
  const [live, setLive] = useState<Live>({ up: true, readings: 0, findings: 0, records: 0, matters: 0, latest: null })
  const now = useRef(input)
  now.current = input
  const { site } = input
  useEffect(() => {
    let latest: number | null = null
    const findings = throttle(() => setLive((old) => ({ ...old, findings: old.findings + 1 })), FINDINGS_EVERY)
    const readings = throttle(() => setLive((old) => ({ ...old, readings: old.readings + 1, latest })), TRACE_EVERY)
    const records = throttle(
      () => setLive((old) => ({ ...old, records: old.records + 1, findings: old.findings + 1 })),
      RECORDS_AFTER,
    )
    const stop = listenLive(
      site,
      (news) => {
        if (news.kind === 'sheet') now.current.onSheet()
        else if (news.kind === 'records') records.ask()
        else if (news.kind === 'matters') setLive((old) => ({ ...old, matters: old.matters + 1 }))
        else if (news.channel === '' || now.current.shows(news.channel)) {
          if (news.channel === now.current.channel) latest = Math.max(latest ?? 0, news.to ?? 0) || null
          readings.ask()
          findings.ask()
        }
      },
      (up) => setLive((old) => (old.up === up ? old : { ...old, up })),
    )
    return () => {
      stop()
      for (const one of [findings, readings, records]) one.stop()
    }
  }, [site])
  return live
}
