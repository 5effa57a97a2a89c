import type { JSX } from 'preact'
import { words } from '../words.ts'

/** What the program merged, missed or set aside. */
export function Notes({ notes }: { notes: readonly string[] }): JSX.Element | null {
  if (notes.length === 0) return null
  return (
    <section class="notes" aria-labelledby="notes-heading">
      <h2 id="notes-heading">{words.notes.heading}</h2>
      <ul>
        {notes.map((note) => (
          <li key={note}>{note}</li>
        ))}
      </ul>
    </section>
  )
}
