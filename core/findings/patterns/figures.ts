import { rounded } from '../words.ts'

/** Figures as they leave the program. */
export function figuresOf(figures: Readonly<Record<string, number>>): Record<string, number> {
  return Object.fromEntries(Object.entries(figures).map(([name, value]) => [name, rounded(value)]))
}
