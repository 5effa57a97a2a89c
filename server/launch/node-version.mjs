/** Oldest Node.js the program runs on; package.json "engines" says the same. */
export const OLDEST_NODE = '20.11'

/**
 * One sentence for a Node.js that is too old, nothing for one that will do.
 * @param {string} version such as "20.11.1"
 * @returns {string | undefined}
 */
export function whyNotThisNode(version) {
  const [major = 0, minor = 0] = version.split('.').map(Number)
  const [needMajor = 0, needMinor = 0] = OLDEST_NODE.split('.').map(Number)
  if (major > needMajor || (major === needMajor && minor >= needMinor)) return undefined
  return `Leaktide needs Node.js ${OLDEST_NODE} or newer, and this is Node.js ${version}.`
}
