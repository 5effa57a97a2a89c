import type { JSX } from 'preact'
import { words } from '../words.ts'

/** More notes than this are folded: the first ones say most. */
const SHOWN = 3

/** What the program merged, missed or set aside. */
export function Notes({ notes }: { notes: readonly string[] }): JSX.Element | null {
  if (notes.length === 0) return null
  return (
    <section class="notes" aria-labelledby="notes-heading">
      <h2 id="notes-heading">{words.notes.heading}</h2>
      <NoteList notes={notes.slice(0, SHOWN)} />
      {notes.length > SHOWN && (
        <details class="fold">
          <summary>{words.notes.more(notes.length - SHOWN)}</summary>
          <NoteList notes={notes.slice(SHOWN)} />
        </details>
      )}
    </section>
  )
}

function NoteList({ notes }: { notes: readonly string[] }): JSX.Element {
  return (
    <ul>
      {notes.map((note) => (
        <li key={note}>{note}</li>
      ))}
    </ul>
  )
}
