import { make, outOfDate } from '../../server/launch/build.mjs'

/** Builds the page when its sources changed since it was built. */
export async function buildPage(): Promise<void> {
  for (const build of outOfDate()) {
    if (build.name === 'page') await make(build, () => undefined)
  }
}
