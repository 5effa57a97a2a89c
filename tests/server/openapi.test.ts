import { Ajv2020 } from 'ajv/dist/2020.js'
import fc from 'fast-check'
import type { OpenAPIV3_1 } from 'openapi-types'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Harness, startHarness } from './harness.ts'
import { type Operation, operationsOf } from './operations.ts'
import { arbitraryOf } from './schema-arbitrary.ts'

describe('the OpenAPI document', () => {
  let h: Harness
  let document: OpenAPIV3_1.Document
  let operations: readonly Operation[]
  let site: string
  const ajv = new Ajv2020({ strict: false, validateFormats: false })
  beforeAll(async () => {
    h = await startHarness()
    site = await h.makeSite()
    ;({ document, operations } = await operationsOf(h.app))
  })
  afterAll(() => h.close())

  it('is OpenAPI 3.1 and describes the whole contract', () => {
    expect(document.openapi).toBe('3.1.0')
    const names = operations.map(({ method, path }) => `${method} ${path}`)
    for (const kind of ['trips', 'switchings', 'timetables', 'tests', 'remedies']) {
      expect(names).toEqual(
        expect.arrayContaining([
          `POST /sites/{site}/${kind}`,
          `GET /sites/{site}/${kind}`,
          `GET /sites/{site}/${kind}/{id}`,
          `GET /sites/{site}/${kind}/{id}/corrections`,
          `PATCH /sites/{site}/${kind}/{id}`,
          `DELETE /sites/{site}/${kind}/{id}`,
        ]),
      )
    }
    expect(names).toEqual(
      expect.arrayContaining([
        'POST /sites',
        'GET /sites',
        'GET /sites/{site}',
        'PATCH /sites/{site}',
        'DELETE /sites/{site}',
        'POST /sites/{site}/readings',
        'GET /sites/{site}/channels/{channel}/trace',
        'GET /sites/{site}/channels/{channel}/readings',
        'GET /sites/{site}/live',
        'GET /sites/{site}/rcds/{rcd}/findings',
        'POST /sites/{site}/keys',
        'GET /sites/{site}/keys',
        'DELETE /sites/{site}/keys/{id}',
      ]),
    )
  })

  it('gives every operation a summary, a tag, its answers and its errors, in schemas that are valid', () => {
    const tags = document.tags?.map(({ name }) => name)
    for (const { method, path, operation } of operations) {
      const what = `${method} ${path}`
      expect(operation.summary, what).toBeTruthy()
      expect(tags, what).toContain(operation.tags?.[0])
      const statuses = Object.keys(operation.responses ?? {})
      expect(
        statuses.some((status) => status.startsWith('2')),
        what,
      ).toBe(true)
      expect(statuses, what).toEqual(expect.arrayContaining(['429', '500', '503']))
      if (['POST', 'PATCH', 'PUT'].includes(method)) expect(operation.requestBody, what).toBeDefined()
      for (const answer of Object.values(operation.responses ?? {}) as OpenAPIV3_1.ResponseObject[]) {
        expect(answer.description, what).toBeTruthy()
        expect(answer.description, what).not.toBe('Default Response')
        for (const media of Object.values(answer.content ?? {})) ajv.compile(media.schema as object)
      }
      for (const media of Object.values(bodyOf(operation))) ajv.compile(media.schema as object)
      const named = [...path.matchAll(/\{(\w+)\}/g)].map((match) => match[1])
      const parameters = (operation.parameters ?? []) as OpenAPIV3_1.ParameterObject[]
      expect(
        parameters.filter((one) => one.in === 'path').map(({ name }) => name),
        what,
      ).toEqual(named)
    }
  })

  it('reads as a page without scripts', async () => {
    const page = await h.app.inject('/api')
    expect(page.headers['content-type']).toContain('text/html')
    expect(page.body).toContain('/api/sites/{site}/rcds/{rcd}/findings')
    expect(page.body).not.toMatch(/<script|<style|style=/)
    const style = await h.app.inject('/api/reference.css')
    expect(style.headers['content-type']).toContain('text/css')
  })

  it('holds against bodies made from its own schemas, whole or with a part gone wrong', async () => {
    const withBody = operations.filter(
      ({ method, path }) => ['POST', 'PATCH', 'PUT'].includes(method) && path !== '/session',
    )
    for (const one of withBody) {
      for (const [type, media] of Object.entries(bodyOf(one.operation))) {
        await fc.assert(
          fc.asyncProperty(arbitraryOf(media.schema as object), async (body) => {
            const path = one.path.replace('{site}', site).replace('{id}', 'none')
            const answer = await h.call(one.method, path, body, { headers: { 'content-type': type } })
            const described = one.operation.responses?.[answer.statusCode] as OpenAPIV3_1.ResponseObject | undefined
            expect(answer.statusCode, `${one.method} ${path} ${answer.body}`).toBeLessThan(500)
            expect(described, `${one.method} ${path} ${answer.statusCode}`).toBeDefined()
            const [answered] = String(answer.headers['content-type']).split(';')
            const schema = described!.content?.[answered!]?.schema as object
            expect(ajv.validate(schema, answer.json()), JSON.stringify(ajv.errors)).toBe(true)
          }),
          { numRuns: 25, seed: 20260921 },
        )
      }
    }
  })
})

function bodyOf(operation: OpenAPIV3_1.OperationObject): Record<string, OpenAPIV3_1.MediaTypeObject> {
  return (operation.requestBody as OpenAPIV3_1.RequestBodyObject | undefined)?.content ?? {}
}
