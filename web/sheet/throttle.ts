/** Runs a task some time after it was asked for, and never more often than that. */
export interface Throttle {
  ask(): void
  stop(): void
}

/** One run stands for everything asked within `every` ms; the run comes at the end of that time, so nothing is missed. */
export function throttle(task: () => void, every: number): Throttle {
  let timer: ReturnType<typeof setTimeout> | null = null
  return {
    ask: () => {
      timer ??= setTimeout(() => {
        timer = null
        task()
      }, every)
    },
    stop: () => {
      if (timer !== null) clearTimeout(timer)
      timer = null
    },
  }
}
