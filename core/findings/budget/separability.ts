/** Rows of a regression whose entries are mostly 0: positions and entries, and what was seen. */
export interface SparseDesign {
  /** Number of columns. */
  readonly p: number
  readonly index: readonly (readonly number[])[]
  readonly signs: readonly (readonly number[])[]
  readonly y: Float64Array
}

/**
 * Which columns make a basis, and for each column the others it can be traded against without changing a single row:
 * its coefficient is then not determined. Exact, for the Gram matrix holds small whole numbers.
 */
export function separability(design: SparseDesign): { basis: number[]; partners: number[][] } {
  const { p } = design
  const a = gram(design)
  const tolerance = 1e-9 * Math.max(1, design.y.length)
  const pivots: number[] = []
  let row = 0
  for (let column = 0; column < p && row < p; column++) {
    let best = row
    for (let r = row + 1; r < p; r++) if (Math.abs(a[r * p + column]!) > Math.abs(a[best * p + column]!)) best = r
    if (Math.abs(a[best * p + column]!) <= tolerance) continue
    for (let c = 0; c < p; c++) {
      const held = a[row * p + c]!
      a[row * p + c] = a[best * p + c]!
      a[best * p + c] = held
    }
    const scale = a[row * p + column]!
    for (let c = 0; c < p; c++) a[row * p + c]! /= scale
    for (let r = 0; r < p; r++) {
      const factor = a[r * p + column]!
      if (r === row || factor === 0) continue
      for (let c = 0; c < p; c++) a[r * p + c]! -= factor * a[row * p + c]!
    }
    pivots.push(column)
    row++
  }
  const partners: Set<number>[] = Array.from({ length: p }, () => new Set())
  for (let free = 0; free < p; free++) {
    if (pivots.includes(free)) continue
    // The null vector of this free column: itself, and what its row entries ask of the pivots.
    const members = [free, ...pivots.filter((_, r) => Math.abs(a[r * p + free]!) > 1e-6)]
    for (const j of members) for (const k of members) if (j !== k) partners[j]!.add(k)
  }
  return { basis: pivots, partners: partners.map((set) => [...set].sort((x, y) => x - y)) }
}

/** XᵀX, row by row. */
function gram({ p, index, signs }: SparseDesign): Float64Array {
  const g = new Float64Array(p * p)
  index.forEach((row, i) => {
    for (let k = 0; k < row.length; k++) {
      for (let l = 0; l < row.length; l++) g[row[k]! * p + row[l]!]! += signs[i]![k]! * signs[i]![l]!
    }
  })
  return g
}
