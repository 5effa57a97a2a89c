import fc from 'fast-check'

interface Schema {
  readonly type?: string | readonly string[]
  readonly properties?: Readonly<Record<string, Schema>>
  readonly required?: readonly string[]
  readonly items?: Schema | boolean
  readonly prefixItems?: readonly Schema[]
  readonly anyOf?: readonly Schema[]
  readonly oneOf?: readonly Schema[]
  readonly enum?: readonly unknown[]
  readonly const?: unknown
  readonly examples?: readonly unknown[]
  readonly minimum?: number
  readonly maximum?: number
  readonly exclusiveMinimum?: number
  readonly pattern?: string
  readonly maxLength?: number
}

/** Bodies after a JSON schema: most of them fit, some have a part replaced by anything that JSON can say. */
export function arbitraryOf(schema: Schema): fc.Arbitrary<unknown> {
  return fc.oneof(
    { weight: 3, arbitrary: fitting(schema, 0) },
    { weight: 3, arbitrary: broken(schema, 0) },
    fc.jsonValue(),
  )
}

function broken(schema: Schema, depth: number): fc.Arbitrary<unknown> {
  const inside = (part: Schema): fc.Arbitrary<unknown> =>
    fc.oneof(
      { weight: 4, arbitrary: fitting(part, depth + 1) },
      { weight: 1, arbitrary: fc.jsonValue({ maxDepth: 2 }) },
    )
  const branches = schema.anyOf ?? schema.oneOf
  if (branches !== undefined) return fc.oneof(...branches.map((branch) => broken(branch, depth)))
  if (schema.properties !== undefined) {
    return fc.record(
      Object.fromEntries(Object.entries(schema.properties).map(([name, part]) => [name, inside(part)])),
      {
        requiredKeys: [],
      },
    )
  }
  if (typeof schema.items === 'object') return fc.array(inside(schema.items), { maxLength: 4 })
  return inside(schema)
}

function fitting(schema: Schema, depth: number): fc.Arbitrary<unknown> {
  const branches = schema.anyOf ?? schema.oneOf
  if (branches !== undefined) return fc.oneof(...branches.map((branch) => fitting(branch, depth)))
  if (schema.const !== undefined) return fc.constant(schema.const)
  if (schema.enum !== undefined) return fc.constantFrom(...schema.enum)
  if (schema.prefixItems !== undefined) return fc.tuple(...schema.prefixItems.map((part) => fitting(part, depth + 1)))
  const type = typeof schema.type === 'string' ? schema.type : (schema.type?.[0] ?? 'any')
  switch (type) {
    case 'object':
      return fc.record(
        Object.fromEntries(
          Object.entries(schema.properties ?? {}).map(([name, part]) => [name, fitting(part, depth + 1)]),
        ),
        { requiredKeys: [...(schema.required ?? [])] },
      )
    case 'array':
      return typeof schema.items === 'object' && depth < 6
        ? fc.array(fitting(schema.items, depth + 1), { maxLength: 4 })
        : fc.constant([])
    case 'string':
      return text(schema)
    case 'integer':
    case 'number':
      return number(schema, type === 'integer')
    case 'boolean':
      return fc.boolean()
    case 'null':
      return fc.constant(null)
    default:
      return fc.jsonValue({ maxDepth: 1 })
  }
}

/** References and times of the test site come up often, so that some bodies get all the way into the store. */
const KNOWN = [
  'A',
  '7',
  'mixer',
  'tails-a',
  'load:mixer',
  'circuit:7',
  '2026-09-21T02:14:05Z',
  'Europe/Vienna',
  '02:00',
]

function text(schema: Schema): fc.Arbitrary<string> {
  const pattern = schema.pattern === undefined ? undefined : new RegExp(schema.pattern)
  const fits = KNOWN.filter((one) => pattern?.test(one) ?? true)
  const free = fc.string({ maxLength: Math.min(schema.maxLength ?? 30, 30), unit: 'binary' })
  const any = pattern === undefined ? free : fc.stringMatching(pattern)
  return fits.length > 0 ? fc.oneof(fc.constantFrom(...fits), any) : any
}

function number(schema: Schema, whole: boolean): fc.Arbitrary<number> {
  const min = schema.minimum ?? schema.exclusiveMinimum ?? -1e12
  const max = schema.maximum ?? 2e12
  const at = fc
    .integer({ min: 1_789_000_000_000, max: 1_791_000_000_000 })
    .filter((value) => value >= min && value <= max)
  const inside = whole
    ? fc.integer({ min: Math.ceil(Math.max(min, -1e15)), max: Math.floor(Math.min(max, 1e15)) })
    : fc.double({ min, max, noNaN: true })
  return max >= 1_791_000_000_000 ? fc.oneof(at, inside) : inside
}
