import type { FastifySchemaCompiler } from 'fastify'
import fp from 'fastify-plugin'
import { serializerCompiler } from 'fastify-type-provider-zod'
import type { z } from 'zod'
import { issuesOf } from '../intake/check.ts'
import { Refused } from '../intake/refused.ts'

/** Bodies that do not fit are refused (422); queries and paths that do not fit are unreadable (400). */
const compiler: FastifySchemaCompiler<z.ZodType> =
  ({ schema, httpPart }) =>
  (data: unknown) => {
    const parsed = schema.safeParse(data)
    if (parsed.success) return { value: parsed.data }
    const issues = issuesOf(parsed.error.issues)
    if (httpPart === 'body') return { error: new Refused('The body does not fit.', issues) }
    const [first] = issues
    const message = `The query does not fit: "${first?.path.slice(1)}" ${first?.why}.`
    return { error: new Refused(message, issues, { kind: 'unreadable' }) }
  }

/** Validates by the zod schemas of core/contract and writes answers through them. */
export const checkingPlugin = fp(
  async (app) => {
    app.setValidatorCompiler(compiler)
    app.setSerializerCompiler(serializerCompiler)
  },
  { name: 'checking', dependencies: ['problems'] },
)
