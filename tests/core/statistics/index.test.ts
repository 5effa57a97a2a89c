import { expect, it } from 'vitest'
import * as statistics from '../../../core/statistics/index.ts'

// The table of contents is part of the interface: a name that comes or goes must be meant.
it('exports exactly these names', () => {
  expect(Object.keys(statistics).sort()).toEqual(
    `JEFFREYS MAD_TO_SIGMA benjaminiHochberg binomialCdf binomialPmf binomialTest binomialUpperTail breakpoints
    breslowDay changepointBiweight changepointL2 changepointPoisson chiSquaredCdf chiSquaredUpperTail
    circularShiftTest clopperPearson conditionalLogit eventCoincidence firthLogistic fisherExact gammaPoisson gammaQuantile gammaRegularised
    generalisedPareto hashText hodgesLehmann hodgesLehmannShift holm huberRegression kuiper laggedCorrelation
    leastSquares logChoose logEvidence logGamma logPoissonPmf logisticRegression lombScargle lombScargleFalseAlarm mad mannKendall
    mantelHaenszel mantelHaenszelExact mantelHaenszelRates meanDirection meanRanks medcouple median medianSorted
    nnls noEventProbability paretoQuantile poissonBinomialUpperTail poissonCdf poissonPmf poissonRate poissonRateRatio poissonRateTest poissonRegression
    poissonUpperTail predictiveCdf predictivePmf qr quantile quantileSorted quietExposure raoSpacing rateQuantile
    rayleigh rayleighDirected ruleOfThree seededRandom theilSen vonMises vonMisesKappa weightedQuantile
    weightedQuantiles`.split(/\s+/),
  )
})
