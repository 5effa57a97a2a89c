export { benjaminiHochberg } from './benjamini-hochberg.ts'
export { binomialCdf, binomialPmf, binomialUpperTail } from './binomial.ts'
export { type Breakpoints, type Breaks, breakpoints } from './breakpoints.ts'
export { changepointBiweight } from './changepoint-biweight.ts'
export { changepointL2 } from './changepoint-l2.ts'
export { changepointPoisson } from './changepoint-poisson.ts'
export { chiSquaredCdf, chiSquaredUpperTail } from './chi-squared.ts'
export { binomialTest, clopperPearson, type Proportion } from './clopper-pearson.ts'
export { type ConditionalLogit, conditionalLogit } from './conditional-logit.ts'
export type { ConditionalOdds } from './conditional-odds.ts'
export {
  type CircularShiftTest,
  type CorrelationKind,
  circularShiftTest,
  laggedCorrelation,
  meanRanks,
} from './correlation.ts'
export type { Design } from './design.ts'
export { type EventCoincidence, eventCoincidence } from './event-coincidence.ts'
export type { ExactPValues } from './exact-test.ts'
export { type FirthFit, firthLogistic } from './firth-logistic.ts'
export { fisherExact, type Table } from './fisher-exact.ts'
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
export { type GeneralisedPareto, generalisedPareto, paretoQuantile } from './generalised-pareto.ts'
export { hashText } from './hash-text.ts'
export { hodgesLehmann, hodgesLehmannShift } from './hodges-lehmann.ts'
export { holm } from './holm.ts'
export { type HuberFit, type HuberOptions, huberRegression } from './huber-regression.ts'
export { type Kuiper, kuiper } from './kuiper.ts'
export { type LeastSquares, leastSquares } from './least-squares.ts'
export { logChoose } from './log-choose.ts'
export { logGamma } from './log-gamma.ts'
export { type LogisticFit, logisticRegression } from './logistic-regression.ts'
export { type LombScargle, lombScargle, lombScargleFalseAlarm } from './lomb-scargle.ts'
export { MAD_TO_SIGMA, mad } from './mad.ts'
export { type MannKendall, mannKendall } from './mann-kendall.ts'
export {
  breslowDay,
  type Homogeneity,
  type MantelHaenszel,
  type MantelHaenszelRates,
  mantelHaenszel,
  mantelHaenszelExact,
  mantelHaenszelRates,
  type RateStratum,
} from './mantel-haenszel.ts'
export type { Fit } from './maximise.ts'
export { type MeanDirection, meanDirection } from './mean-direction.ts'
export { medcouple } from './medcouple.ts'
export { median, medianSorted } from './median.ts'
export { type Nnls, nnls } from './nnls.ts'
export type { Partition } from './partition.ts'
export { poissonBinomialUpperTail } from './poisson-binomial.ts'
export { poissonCdf, poissonUpperTail } from './poisson-cdf.ts'
export { logPoissonPmf, poissonPmf } from './poisson-pmf.ts'
export { type PoissonRate, poissonRate, poissonRateTest } from './poisson-rate.ts'
export { type PoissonRateRatio, poissonRateRatio } from './poisson-rate-ratio.ts'
export { type PoissonFit, poissonRegression } from './poisson-regression.ts'
export { type Qr, qr } from './qr.ts'
export { type QuantileType, quantile, quantileSorted } from './quantile.ts'
export { type Random, seededRandom } from './random.ts'
export { type RaoSpacing, raoSpacing } from './rao-spacing.ts'
export { type DirectedRayleigh, type Rayleigh, rayleigh, rayleighDirected } from './rayleigh.ts'
export { ruleOfThree } from './rule-of-three.ts'
export { type TheilSen, theilSen } from './theil-sen.ts'
export { type VonMises, vonMises, vonMisesKappa } from './von-mises.ts'
export { weightedQuantile, weightedQuantiles } from './weighted-quantile.ts'
