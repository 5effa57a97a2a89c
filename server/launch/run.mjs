import { spawn } from 'node:child_process'
import { closeSync, mkdirSync, openSync } from 'node:fs'
import { constants } from 'node:os'
import { dirname } from 'node:path'
import { ROOT } from './paths.mjs'

/** @type {Set<import('node:child_process').ChildProcess>} */
const running = new Set()

/**
 * Runs a program in the project's folder and waits for it.
 * @param {string} file
 * @param {readonly string[]} args
 * @param {{ log?: string, env?: Record<string, string> }} [options] `log`: its output goes to this file, not to the terminal
 * @returns {Promise<number>} its exit code; 128 + the signal's number when a signal ended it, 127 when it could not start
 */
export function run(file, args, options = {}) {
  const { log, env } = options
  if (log) mkdirSync(dirname(log), { recursive: true })
  const out = log ? openSync(log, 'w') : undefined
  return new Promise((resolve) => {
    const child = spawn(file, args, {
      cwd: ROOT,
      env: { ...process.env, ...env },
      stdio: out === undefined ? 'inherit' : ['ignore', out, out],
    })
    running.add(child)
    /** @param {number} code */
    const done = (code) => {
      if (!running.delete(child)) return // a program that could not start reports twice
      if (out !== undefined) closeSync(out)
      resolve(code)
    }
    child.on('error', () => done(127))
    child.on('close', (code, signal) => done(code ?? 128 + (signal ? constants.signals[signal] : 0)))
  })
}

/**
 * Runs a JavaScript file with this same Node.js.
 * @param {string} script
 * @param {readonly string[]} args
 * @param {{ log?: string, env?: Record<string, string> }} [options]
 * @returns {Promise<number>}
 */
export function runNode(script, args, options) {
  return run(process.execPath, [script, ...args], options)
}

/**
 * Until called off, SIGTERM and SIGINT end what runs and then this process, so that nothing goes on building unseen.
 * @returns {() => void} gives the signals back
 */
export function stopChildrenOnSignal() {
  /** @param {NodeJS.Signals} signal */
  const stop = (signal) => {
    for (const child of running) child.kill(signal)
    process.exit(128 + constants.signals[signal])
  }
  process.on('SIGTERM', stop)
  process.on('SIGINT', stop)
  return () => {
    process.off('SIGTERM', stop)
    process.off('SIGINT', stop)
  }
}
