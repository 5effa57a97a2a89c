import { expect, it } from 'vitest'
import * as statistics from '../../../core/statistics/index.ts'

// The table of contents is part of the interface: a name that comes or goes must be meant.
it('exports exactly these names', () => {
  expect(Object.keys(statistics).sort()).toEqual(
    `JEFFREYS MAD_TO_SIGMA benjaminiHochberg binomialCdf binomialPmf binomialTest binomialUpperTail chiSquaredCdf chiSquaredUpperTail
    clopperPearson gammaPoisson gammaQuantile gammaRegularised hashText holm logChoose logEvidence logGamma logPoissonPmf mad median
    medianSorted noEventProbability poissonCdf poissonPmf poissonRate poissonRateRatio poissonRateTest poissonUpperTail predictiveCdf
    predictivePmf quantile quantileSorted quietExposure rateQuantile ruleOfThree seededRandom weightedQuantile weightedQuantiles`.split(
      /\s+/,
    ),
  )
})
