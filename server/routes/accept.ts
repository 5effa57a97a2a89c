/**
 * The media type among `offered` that an Accept header prefers (RFC 9110, 12.5.1); the first one without a header,
 * undefined when none will do.
 */
export function preferred<T extends string>(accept: string | undefined, offered: readonly T[]): T | undefined {
  if (accept === undefined || accept.trim() === '') return offered[0]
  const ranges = accept.split(',').map((part) => {
    const [range = '', ...parameters] = part.split(';').map((piece) => piece.trim().toLowerCase())
    const weight = parameters.find((parameter) => parameter.startsWith('q='))
    return { range, q: weight === undefined ? 1 : Number(weight.slice(2)) || 0 }
  })
  const weightOf = (type: T): number => {
    const family = `${type.split('/')[0]}/*`
    for (const range of [type, family, '*/*']) {
      const named = ranges.find((one) => one.range === range)
      if (named !== undefined) return named.q
    }
    return 0
  }
  const best = offered.reduce((a, b) => (weightOf(b) > weightOf(a) ? b : a))
  return weightOf(best) > 0 ? best : undefined
}
