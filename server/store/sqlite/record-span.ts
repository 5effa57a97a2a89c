import {
  EARLIEST_MS,
  LATEST_MS,
  type RecordBodies,
  type RecordKind,
  type Timetable,
  type Trip,
} from '../../../core/contract/index.ts'

/** First and last instant of a record, both included, epoch ms. */
export interface RecordSpan {
  readonly from: number
  readonly to: number
}

/** When a record is: an instant, the interval a trip lies in, or the time a timetable holds. */
export function recordSpan<K extends RecordKind>(kind: K, body: RecordBodies[K]): RecordSpan {
  if (kind === 'trip') {
    const trip = body as Trip
    const from = trip.at ?? trip.after ?? EARLIEST_MS
    return { from, to: trip.at ?? trip.before ?? from }
  }
  if (kind === 'timetable') {
    const table = body as Timetable
    return { from: table.from ?? EARLIEST_MS, to: (table.until ?? LATEST_MS) - 1 }
  }
  const { at } = body as RecordBodies['switching' | 'test' | 'remedy']
  return { from: at, to: at }
}
