import type { FastifyInstance } from 'fastify'
import type { OpenAPIV3_1 } from 'openapi-types'

export interface Operation {
  readonly method: string
  /** Below /api, with {site}, {id}, … */
  readonly path: string
  readonly operation: OpenAPIV3_1.OperationObject
}

/** Every operation of the OpenAPI document that the app answers. */
export async function operationsOf(
  app: FastifyInstance,
): Promise<{ readonly document: OpenAPIV3_1.Document; readonly operations: readonly Operation[] }> {
  const document = (await app.inject('/api/openapi.json')).json<OpenAPIV3_1.Document>()
  const operations = Object.entries(document.paths ?? {}).flatMap(([path, item]) =>
    Object.entries(item ?? {}).map(([method, operation]) => ({
      method: method.toUpperCase(),
      path: path.replace(/^\/api/, ''),
      operation: operation as OpenAPIV3_1.OperationObject,
    })),
  )
  return { document, operations }
}
