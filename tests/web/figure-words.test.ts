import { describe, expect, it } from 'vitest'
import { figureWords } from '../../web/line-up/figure-words.ts'

describe('figureWords', () => {
  it.each([
    ['usualHeadroomMa', 12.4, 'usual headroom', '12.4\u202fmA'],
    ['hoursInside', 2.2, 'hours inside', '2.20'],
    ['energisedHours', 165, 'energised', '165\u202fh'],
    ['rateRatio', 222.4, 'rate ratio', '222'],
    ['trips', 8, 'trips', '8'],
    ['riseMa', null, 'rise', 'not known'],
  ])('reads %s: %s', (name, value, said, figure) => {
    expect(figureWords(name, value)).toEqual({ name: said, value: figure })
  })
})
