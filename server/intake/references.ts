import type { ProblemIssue, RecordBodies, RecordKind, SiteSheet } from '../../core/contract/index.ts'
import { pointer } from './pointer.ts'

interface Named {
  readonly path: readonly PropertyKey[]
  readonly of: string
}

/** Everything a record names that its site's sheet does not have, each with its place below `at`. */
export function dangling<K extends RecordKind>(
  body: RecordBodies[K],
  sheet: SiteSheet,
  at: readonly PropertyKey[],
): ProblemIssue[] {
  const known = subjectsOf(sheet)
  return namedBy(body)
    .filter(({ of }) => !known.has(of))
    .map(({ path, of }) => {
      const [kind, ref] = of.split(':') as [string, string]
      return { path: pointer([...at, ...path]), why: `there is no ${kind} "${ref}" on the sheet of this site` }
    })
}

function namedBy(body: RecordBodies[RecordKind]): Named[] {
  const named: Named[] = []
  if ('rcd' in body && body.rcd !== undefined) named.push({ path: ['rcd'], of: `rcd:${body.rcd}` })
  if ('of' in body && body.of !== undefined) named.push({ path: ['of'], of: body.of })
  for (const list of ['running', 'off'] as const) {
    const subjects = (body as { readonly running?: readonly string[]; readonly off?: readonly string[] })[list] ?? []
    subjects.forEach((of, i) => {
      named.push({ path: [list, i], of })
    })
  }
  return named
}

function subjectsOf(sheet: SiteSheet): ReadonlySet<string> {
  const subjects = new Set<string>()
  for (const rcd of sheet.rcds) {
    subjects.add(`rcd:${rcd.ref}`)
    for (const circuit of rcd.circuits) {
      subjects.add(`circuit:${circuit.ref}`)
      for (const load of circuit.loads) subjects.add(`load:${load.ref}`)
    }
  }
  return subjects
}
