import { bakeryWeek } from '../../core/simulate/bakery.ts'
import { type Api, postSimulated } from './post-simulated.ts'

/**
 * Posts the example site, a village bakery with one recorded week that begins on the local day of `startMs`, through the API of a
 * running server. Resolves with the site's id and the device to look at.
 */
export async function postDemo(options: Api & { readonly startMs: number }): Promise<{ site: string; rcd: string }> {
  options.onProgress?.('recording a week in a village bakery')
  const week = bakeryWeek(options.startMs)
  return { site: await postSimulated(options, week), rcd: week.truth.rcd }
}
