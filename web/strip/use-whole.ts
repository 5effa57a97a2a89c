import { useMemo } from 'preact/hooks'
import type { View } from './view.ts'

/** The whole period of the strip: that of the findings, made longer by what arrives while one looks (null: nothing did). */
export function useWhole(from: number, to: number, latest: number | null): View {
  const end = Math.max(to, (latest ?? 0) + 1)
  return useMemo(() => ({ from, to: end }), [from, end])
}
