import { join } from 'node:path'
import { make, outOfDate } from './build.mjs'
import { install, isInstalled } from './install.mjs'
import { withLock } from './lock.mjs'
import { whyNotThisNode } from './node-version.mjs'
import { SCRATCH } from './paths.mjs'
import { stopChildrenOnSignal } from './run.mjs'

/**
 * Brings a checkout to where it can run: the right Node.js, the locked dependencies, both builds. Does nothing, and says
 * nothing, when all is there.
 * @returns {Promise<boolean>} false when it could not, after saying why in one sentence
 */
export async function prepare() {
  try {
    await bringUpToDate()
    return true
  } catch (error) {
    say(error instanceof Error ? error.message : String(error))
    return false
  }
}

async function bringUpToDate() {
  const wrongNode = whyNotThisNode(process.versions.node)
  if (wrongNode) throw new Error(wrongNode)
  if (isInstalled() && outOfDate().length === 0) return

  const giveSignalsBack = stopChildrenOnSignal()
  try {
    await withLock(join(SCRATCH, 'lock'), { onWait: sayWhoHolds }, async () => {
      if (!isInstalled()) await install(say)
      for (const build of outOfDate()) await make(build, say)
    })
  } finally {
    giveSignalsBack()
  }
}

/** @param {string} text */
function say(text) {
  process.stderr.write(`${text}\n`)
}

/** @param {number | undefined} pid */
function sayWhoHolds(pid) {
  say(`Another start${pid ? ` (process ${pid})` : ''} is preparing this checkout; waiting for it.`)
}
