import { existsSync } from 'node:fs'

const PLACES = [
  '/usr/bin/chromium',
  '/usr/bin/chromium-browser',
  '/usr/bin/google-chrome',
  '/Applications/Chromium.app/Contents/MacOS/Chromium',
  '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
]

/**
 * Where this machine keeps a Chromium for the browser tests; LEAKTIDE_CHROMIUM may name another place.
 * @returns {string | undefined}
 */
export function findChromium() {
  const named = process.env.LEAKTIDE_CHROMIUM
  return (named ? [named] : PLACES).find((place) => existsSync(place))
}
