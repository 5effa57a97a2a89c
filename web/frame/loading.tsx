import type { JSX } from 'preact'

/** Something is on its way; says what, and moves only for those who like motion. */
export function Loading({ text }: { text: string }): JSX.Element {
  return (
    <p class="state loading" role="status">
      <span class="wave" aria-hidden="true" />
      {text}
    </p>
  )
}
