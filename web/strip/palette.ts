import { useEffect, useState } from 'preact/hooks'

/** Colours of the drawn parts, as the style sheet sets them for light, dark and print. */
export interface Palette {
  readonly ground: string
  readonly ink: string
  readonly soft: string
  readonly line: string
  readonly copper: string
  readonly rain: string
  readonly trip: string
  readonly night: string
  readonly font: string
}

function readPalette(): Palette {
  const style = getComputedStyle(document.documentElement)
  const of = (name: string): string => style.getPropertyValue(`--${name}`).trim()
  return {
    ground: of('ground'),
    ink: of('ink'),
    soft: of('soft'),
    line: of('line'),
    copper: of('copper'),
    rain: of('rain'),
    trip: of('trip'),
    night: of('night'),
    font: of('sans'),
  }
}

/** The palette, read anew when light turns to dark or a print begins. */
export function usePalette(): Palette {
  const [palette, setPalette] = useState(readPalette)
  useEffect(() => {
    const queries = ['(prefers-color-scheme: dark)', 'print'].map((query) => matchMedia(query))
    const read = (): void => setPalette(readPalette())
    for (const query of queries) query.addEventListener('change', read)
    return () => {
      for (const query of queries) query.removeEventListener('change', read)
    }
  }, [])
  return palette
}
