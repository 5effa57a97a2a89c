import { mkdirSync, mkdtempSync, readFileSync, rmSync, utimesSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { afterAll, describe, expect, it } from 'vitest'
import { fingerprint } from '../../../server/launch/fingerprint.mjs'
import { whyInstallFailed } from '../../../server/launch/install.mjs'
import { withLock } from '../../../server/launch/lock.mjs'
import { OLDEST_NODE, whyNotThisNode } from '../../../server/launch/node-version.mjs'
import { ROOT } from '../../../server/launch/paths.mjs'
import { tally } from '../../../server/launch/tally.mjs'

const scratch = mkdtempSync(join(tmpdir(), 'leaktide-launch-'))
afterAll(() => rmSync(scratch, { recursive: true, force: true }))

describe('whyNotThisNode', () => {
  it.each(['20.11.0', '20.20.2', '22.0.0', '100.1.0'])('has nothing against %s', (version) => {
    expect(whyNotThisNode(version)).toBeUndefined()
  })

  it.each(['18.19.1', '20.10.0', '8.0.0'])('says in one sentence why not %s', (version) => {
    expect(whyNotThisNode(version)).toBe(`Leaktide needs Node.js 20.11 or newer, and this is Node.js ${version}.`)
  })

  it('means what package.json says', () => {
    const { engines } = JSON.parse(readFileSync(join(ROOT, 'package.json'), 'utf8')) as { engines: { node: string } }
    expect(engines.node).toBe(`>=${OLDEST_NODE}`)
  })
})

describe('whyInstallFailed', () => {
  it('names the compilers that are missing', () => {
    const text = whyInstallFailed(1, 'npm error gyp ERR! find Python', ['python3', 'make', 'g++'])
    expect(text).toContain('python3, make, and g++ are missing')
    expect(text).toContain('npm-ci.log')
    expect(text).not.toContain('\n')
  })

  it('gives npm’s own reason for anything else', () => {
    expect(whyInstallFailed(1, 'npm error code ENOSPC\nnpm error syscall write', [])).toContain('npm error code ENOSPC')
  })

  it('says when there is no npm', () => {
    expect(whyInstallFailed(127, '', [])).toContain('npm was not found')
  })
})

describe('fingerprint', () => {
  it('follows names and contents, not times, and leaves out what does not count', () => {
    const tree = join(scratch, 'tree')
    mkdirSync(join(tree, 'a'), { recursive: true })
    writeFileSync(join(tree, 'a', 'one.ts'), 'one')
    const first = fingerprint(tree, ['a', 'missing'])
    utimesSync(join(tree, 'a', 'one.ts'), 1, 1)
    expect(fingerprint(tree, ['a', 'missing'])).toBe(first)
    writeFileSync(join(tree, 'a', 'two.ts'), '')
    expect(fingerprint(tree, ['a', 'missing'])).not.toBe(first)
    expect(fingerprint(tree, ['a', 'missing'], (name) => name !== 'a/two.ts')).toBe(first)
    writeFileSync(join(tree, 'a', 'one.ts'), 'eno')
    expect(fingerprint(tree, ['a'], (name) => name !== 'a/two.ts')).not.toBe(first)
  })
})

describe('withLock', () => {
  it('lets one in at a time, and the next when the first fails', async () => {
    const lock = join(scratch, 'busy')
    let inside = 0
    let most = 0
    const waited: unknown[] = []
    const visit = (fail: boolean): Promise<void> =>
      withLock(lock, { onWait: (pid) => waited.push(pid) }, async () => {
        most = Math.max(most, ++inside)
        await sleep(5)
        inside--
        if (fail) throw new Error('on purpose')
      })
    const outcomes = await Promise.allSettled([visit(true), visit(false), visit(false)])
    expect(outcomes.map(({ status }) => status)).toEqual(['rejected', 'fulfilled', 'fulfilled'])
    expect(most).toBe(1)
    expect(waited).toEqual([process.pid, process.pid])
  })

  it('takes over from a process that is gone', async () => {
    const lock = join(scratch, 'dead')
    mkdirSync(lock)
    writeFileSync(join(lock, 'pid'), '999999999') // above the largest process id of any Linux
    expect(await withLock(lock, {}, async () => 'in')).toBe('in')
  })

  it('takes over a lock that nobody has touched for long', async () => {
    const lock = join(scratch, 'silent')
    mkdirSync(lock)
    writeFileSync(join(lock, 'pid'), String(process.pid))
    utimesSync(lock, 1, 1)
    expect(await withLock(lock, {}, async () => 'in')).toBe('in')
  })
})

describe('tally', () => {
  const file = (status: string, ...tests: string[]) => ({
    status,
    assertionResults: tests.map((one) => ({ status: one })),
  })

  it('counts tests, and a file that did not load as one failed', () => {
    const results = {
      testResults: [file('passed', 'passed', 'passed', 'pending'), file('failed', 'passed', 'failed'), file('failed')],
    }
    expect(tally(results, 1)).toEqual({ passed: 3, failed: 2, skipped: 1 })
  })

  it('lets no failed run pass for a good one', () => {
    expect(tally(undefined, 1)).toEqual({ passed: 0, failed: 1, skipped: 0 })
    expect(tally({ testResults: [file('passed', 'passed')] }, 1)).toEqual({ passed: 1, failed: 1, skipped: 0 })
  })
})
