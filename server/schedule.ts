import cron from 'node-cron'
import { settleReadings } from './jobs/settle.ts'
import type { Store } from './store/port.ts'

/** Calls the jobs by the clock, in UTC: a zone with summer time would skip and double calls. Returns how to stop. */
export function startSchedule(store: Store, onError: (error: unknown) => void): () => Promise<void> {
  let running: Promise<void> = Promise.resolve()
  const task = cron.schedule(
    '* * * * *',
    () => {
      running = settleReadings(store).then(() => undefined, onError)
      return running
    },
    { timezone: 'Etc/UTC', noOverlap: true },
  )
  return async () => {
    await task.stop()
    await running
  }
}
