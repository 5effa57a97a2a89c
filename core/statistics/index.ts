// Distributions and their parts
export { benjaminiHochberg } from './benjamini-hochberg.ts'
export { binomialCdf, binomialPmf, binomialUpperTail } from './binomial.ts'
export { chiSquaredCdf, chiSquaredUpperTail } from './chi-squared.ts'
export { binomialTest, clopperPearson, type Proportion } from './clopper-pearson.ts'
export type { ExactPValues } from './exact-test.ts'
export {
  type GammaBelief,
  gammaPoisson,
  JEFFREYS,
  logEvidence,
  noEventProbability,
  predictiveCdf,
  predictivePmf,
  quietExposure,
  rateQuantile,
} from './gamma-poisson.ts'
export { gammaQuantile } from './gamma-quantile.ts'
export { type GammaTails, gammaRegularised } from './gamma-regularised.ts'
export { hashText } from './hash-text.ts'
export { holm } from './holm.ts'
export { logChoose } from './log-choose.ts'
export { logGamma } from './log-gamma.ts'
export { MAD_TO_SIGMA, mad } from './mad.ts'
export { median, medianSorted } from './median.ts'
export { poissonCdf, poissonUpperTail } from './poisson-cdf.ts'
export { logPoissonPmf, poissonPmf } from './poisson-pmf.ts'
export { type PoissonRate, poissonRate, poissonRateTest } from './poisson-rate.ts'
export { type PoissonRateRatio, poissonRateRatio } from './poisson-rate-ratio.ts'
export { type QuantileType, quantile, quantileSorted } from './quantile.ts'
export { type Random, seededRandom } from './random.ts'
export { ruleOfThree } from './rule-of-three.ts'
export { weightedQuantile, weightedQuantiles } from './weighted-quantile.ts'
