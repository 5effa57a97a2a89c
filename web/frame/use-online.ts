import { useEffect, useState } from 'preact/hooks'

/** Whether the browser has a network at all. */
export function useOnline(): boolean {
  const [online, setOnline] = useState(navigator.onLine)
  useEffect(() => {
    const look = (): void => setOnline(navigator.onLine)
    addEventListener('online', look)
    addEventListener('offline', look)
    return () => {
      removeEventListener('online', look)
      removeEventListener('offline', look)
    }
  }, [])
  return online
}
