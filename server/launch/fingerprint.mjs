import { createHash } from 'node:crypto'
import { readdirSync, readFileSync, statSync } from 'node:fs'
import { join, relative, sep } from 'node:path'

/**
 * SHA-256 over the names and contents of files, in hex. Contents and not times of change: a fresh checkout of the same
 * files need not build again.
 * @param {string} root
 * @param {readonly string[]} entries files and folders below `root`; what is missing counts as missing
 * @param {(name: string) => boolean} [keep] which files of a folder count, by name below `root` with forward slashes
 * @returns {string}
 */
export function fingerprint(root, entries, keep = () => true) {
  const hash = createHash('sha256')
  for (const entry of entries) {
    for (const file of filesOf(join(root, entry))) {
      const name = relative(root, file).split(sep).join('/')
      if (!keep(name)) continue
      const content = readFileSync(file)
      hash.update(`${name}\0${content.length}\0`).update(content)
    }
  }
  return hash.digest('hex')
}

/** @param {string} path @returns {string[]} in an order that does not depend on the file system */
function filesOf(path) {
  const about = statSync(path, { throwIfNoEntry: false })
  if (about === undefined) return []
  if (!about.isDirectory()) return [path]
  return readdirSync(path)
    .sort()
    .flatMap((name) => filesOf(join(path, name)))
}
