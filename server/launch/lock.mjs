import { mkdirSync, readFileSync, renameSync, rmSync, statSync, utimesSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'

/** A holder touches its lock this often, in ms; one untouched for SILENT_MS is taken to be dead. */
const TOUCH_MS = 2_000
const SILENT_MS = 60_000
const LOOK_AGAIN_MS = 100

/**
 * Does `work` while no other process on this machine does it. The lock is a folder, because making a folder either
 * succeeds for one process alone or fails. A lock left behind by a process that died is taken over.
 * @template T
 * @param {string} folder
 * @param {{ onWait?: (pid: number | undefined) => void }} options
 * @param {() => Promise<T>} work
 * @returns {Promise<T>}
 */
export async function withLock(folder, { onWait }, work) {
  let told = false
  while (!take(folder)) {
    if (isLeftBehind(folder)) {
      moveAside(folder)
      continue
    }
    if (!told) onWait?.(holder(folder))
    told = true
    await sleep(LOOK_AGAIN_MS)
  }
  const touch = setInterval(() => utimesSync(folder, new Date(), new Date()), TOUCH_MS)
  const release = () => rmSync(folder, { recursive: true, force: true })
  process.once('exit', release)
  try {
    return await work()
  } finally {
    clearInterval(touch)
    process.off('exit', release)
    release()
  }
}

/** @param {string} folder */
function take(folder) {
  mkdirSync(dirname(folder), { recursive: true })
  try {
    mkdirSync(folder)
  } catch (error) {
    if (codeOf(error) === 'EEXIST') return false
    throw error
  }
  writeFileSync(join(folder, 'pid'), String(process.pid))
  return true
}

/** @param {string} folder */
function isLeftBehind(folder) {
  const pid = holder(folder)
  if (pid !== undefined && !isAlive(pid)) return true
  try {
    return Date.now() - statSync(folder).mtimeMs > SILENT_MS
  } catch (error) {
    if (codeOf(error) === 'ENOENT') return false // given back just now
    throw error
  }
}

/**
 * Renaming succeeds for one of several processes that find the same dead lock; the others just try again.
 * @param {string} folder
 */
function moveAside(folder) {
  const aside = `${folder}.${process.pid}.dead`
  try {
    renameSync(folder, aside)
  } catch (error) {
    if (codeOf(error) === 'ENOENT') return
    throw error
  }
  rmSync(aside, { recursive: true, force: true })
}

/** @param {string} folder @returns {number | undefined} undefined in the moment between making the folder and writing the file */
function holder(folder) {
  try {
    return Number(readFileSync(join(folder, 'pid'), 'utf8')) || undefined
  } catch (error) {
    if (codeOf(error) === 'ENOENT') return undefined
    throw error
  }
}

/** @param {number} pid */
function isAlive(pid) {
  try {
    process.kill(pid, 0)
    return true
  } catch (error) {
    return codeOf(error) === 'EPERM'
  }
}

/** @param {unknown} error */
function codeOf(error) {
  return error instanceof Error && 'code' in error ? error.code : undefined
}
