import { useCallback, useState } from 'preact/hooks'

/** A number that rises with every call of its second half: "ask again". */
export function useVersion(): readonly [number, () => void] {
  const [version, setVersion] = useState(0)
  const rise = useCallback(() => setVersion((n) => n + 1), [])
  return [version, rise]
}
