/** Most leakage that a standard lets a kind of appliance have in use. */
export interface ApplianceLimit {
  readonly kind: string
  readonly label: string
  /** mA whatever the power. */
  readonly ma: number
  /** mA for each kW where that is more, up to `mostMa`. */
  readonly maPerKilowatt?: number
  readonly mostMa?: number
  readonly source: string
}

const HOUSEHOLD = 'IEC 60335-1 clause 13.2 (from memory)'

/** Usual kinds, least first. Limits, not measurements: most sound appliances leak less. */
export const APPLIANCES: readonly ApplianceLimit[] = [
  { kind: 'class-ii', label: 'class II appliance', ma: 0.25, source: HOUSEHOLD },
  { kind: 'portable-class-i', label: 'portable class I appliance', ma: 0.75, source: HOUSEHOLD },
  {
    kind: 'stationary-heating',
    label: 'stationary class I heating appliance',
    ma: 0.75,
    maPerKilowatt: 0.75,
    mostMa: 5,
    source: HOUSEHOLD,
  },
  { kind: 'stationary-motor', label: 'stationary motor-driven class I appliance', ma: 3.5, source: HOUSEHOLD },
  {
    kind: 'information-technology',
    label: 'information technology with a large filter',
    ma: 3.5,
    source: 'IEC 60990, IEC 62368-1 (from memory)',
  },
]

/** The limit of one appliance, mA. Kilowatts matter for stationary heating only. */
export function applianceLimitMa(appliance: ApplianceLimit, kilowatts = 0): number {
  return Math.min(
    Math.max(appliance.ma, (appliance.maPerKilowatt ?? 0) * kilowatts),
    appliance.mostMa ?? Number.POSITIVE_INFINITY,
  )
}
