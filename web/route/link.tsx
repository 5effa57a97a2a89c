import type { ComponentChildren, JSX } from 'preact'
import { go } from './use-route.ts'

interface LinkProps {
  readonly to: string
  readonly class?: string
  readonly current?: boolean
  readonly children: ComponentChildren
}

/** A link within the page; a modified click does what the browser always does. */
export function Link(props: LinkProps): JSX.Element {
  const follow = (event: MouseEvent): void => {
    if (
      event.defaultPrevented ||
      event.button !== 0 ||
      event.metaKey ||
      event.ctrlKey ||
      event.shiftKey ||
      event.altKey
    )
      return
    event.preventDefault()
    go(props.to)
  }
  return (
    <a href={props.to} class={props.class} aria-current={props.current ? 'true' : undefined} onClick={follow}>
      {props.children}
    </a>
  )
}
