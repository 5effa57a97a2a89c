/** Widest letter of a lane's name on average, bold, 13 px. */
const LETTER = 8.2
const PADDING = 18

/** Room for the lanes' names left of the plot, px: the longest fits, within limits; a longer one breaks into lines. */
export function labelWidth(labels: readonly string[], least = 150, most = 260): number {
  const longest = Math.max(0, ...labels.map((label) => label.length))
  return Math.min(most, Math.max(least, Math.ceil(longest * LETTER + PADDING)))
}
