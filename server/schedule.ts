import cron from 'node-cron'
import type { Alerts } from './alerts/alerts.ts'
import { settleReadings } from './jobs/settle.ts'
import type { Store } from './store/port.ts'

/** Calls the jobs by the clock, in UTC: a zone with summer time would skip and double calls. Returns how to stop. */
export function startSchedule(
  store: Store,
  alerts: Pick<Alerts, 'look'>,
  onError: (error: unknown) => void,
): () => Promise<void> {
  const jobs = [
    every('* * * * *', () => settleReadings(store), onError),
    every('*/5 * * * * *', () => alerts.look(), onError),
  ]
  return async () => {
    await Promise.all(jobs.map((stop) => stop()))
  }
}

/** Begins a job at each time, and none while it still runs. Returns how to stop, once what runs has ended. */
function every(times: string, job: () => Promise<unknown>, onError: (error: unknown) => void): () => Promise<void> {
  let running: Promise<void> = Promise.resolve()
  const task = cron.schedule(
    times,
    () => {
      running = job().then(() => undefined, onError)
      return running
    },
    { timezone: 'Etc/UTC', noOverlap: true },
  )
  return async () => {
    await task.stop()
    await running
  }
}
