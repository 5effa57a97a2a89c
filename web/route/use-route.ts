import { useEffect, useState } from 'preact/hooks'
import { type Route, readRoute } from './route.ts'

const MOVED = 'leaktide:moved'

/** Goes to another address of the page without loading it anew. */
export function go(address: string, replace = false): void {
  if (replace) history.replaceState(null, '', address)
  else history.pushState(null, '', address)
  dispatchEvent(new Event(MOVED))
}

/** The route of the address bar, followed through links, back and forward. */
export function useRoute(): Route {
  const [route, setRoute] = useState<Route>(() => readRoute(location.pathname, location.search))
  useEffect(() => {
    const follow = (): void => setRoute(readRoute(location.pathname, location.search))
    addEventListener('popstate', follow)
    addEventListener(MOVED, follow)
    // a page below may have moved on before this one listened: effects run from the inside out
    follow()
    return () => {
      removeEventListener('popstate', follow)
      removeEventListener(MOVED, follow)
    }
  }, [])
  return route
}
