/** Doubles from `first` to `most`, ms, with up to a quarter taken off so that many do not come at once. */
export function backOff(attempt: number, first: number, most: number, chance: () => number): number {
  const whole = Math.min(most, first * 2 ** Math.min(attempt, 40))
  return Math.round(whole * (1 - chance() / 4))
}
