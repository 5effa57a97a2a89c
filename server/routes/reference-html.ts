import type { OpenAPIV3_1 } from 'openapi-types'
import type { Document } from '../plugins/openapi.ts'

type Operation = OpenAPIV3_1.OperationObject
interface Listed {
  readonly id: string
  readonly method: string
  readonly path: string
  readonly operation: Operation
}

const METHODS = ['get', 'post', 'patch', 'put', 'delete'] as const

/** The OpenAPI document as a page to read, without scripts; everything taken from the document is escaped. */
export function referenceHtml(document: Document): string {
  const operations = listOf(document)
  const tags = document.tags ?? []
  const sections = tags.map(({ name, description }) => {
    const own = operations.filter(({ operation }) => operation.tags?.includes(name))
    return `<section><h2 id="${escape(name)}">${escape(name)}</h2><p>${escape(description ?? '')}</p>${own.map(operationHtml).join('')}</section>`
  })
  const links = operations.map(
    ({ id, method, path }) =>
      `<li><a href="#${id}"><code>${escape(method.toUpperCase())} ${escape(path)}</code></a></li>`,
  )
  const title = `${escape(document.info.title)} API`
  return [
    `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1">`,
    `<title>${title}</title><link rel="icon" href="data:,"><link rel="stylesheet" href="/api/reference.css"></head><body>`,
    `<header><h1>${title}</h1><p>${escape(document.info.description ?? '')}</p>`,
    `<p>The same for programs: <a href="/api/openapi.json">openapi.json</a> (OpenAPI ${escape(document.openapi)}).</p></header>`,
    `<nav aria-label="Operations"><ul>${links.join('')}</ul></nav><main>${sections.join('')}</main></body></html>`,
  ].join('\n')
}

function listOf(document: Document): Listed[] {
  return Object.entries(document.paths ?? {}).flatMap(([path, item]) =>
    METHODS.flatMap((method) => {
      const operation = item?.[method]
      const id = `${method}${path.replaceAll(/[^A-Za-z0-9]+/g, '-')}`
      return operation === undefined ? [] : [{ id, method, path, operation }]
    }),
  )
}

function operationHtml({ id, method, path, operation }: Listed): string {
  const body = (operation.requestBody as OpenAPIV3_1.RequestBodyObject | undefined)?.content ?? {}
  return [
    `<details id="${id}"><summary><b>${escape(method.toUpperCase())}</b> <code>${escape(path)}</code> ${escape(operation.summary ?? '')}</summary>`,
    `<p>${escape(operation.description ?? '')}</p>`,
    parametersHtml((operation.parameters ?? []) as OpenAPIV3_1.ParameterObject[]),
    ...Object.entries(body).map(([type, media]) => mediaHtml('Body', type, media)),
    answersHtml(operation.responses ?? {}),
    '</details>',
  ].join('')
}

function parametersHtml(parameters: readonly OpenAPIV3_1.ParameterObject[]): string {
  if (parameters.length === 0) return ''
  const rows = parameters.map((parameter) => {
    const text = parameter.description ?? (parameter.schema as OpenAPIV3_1.SchemaObject | undefined)?.description ?? ''
    return `<tr><td><code>${escape(parameter.name)}</code></td><td class="soft">${escape(parameter.in)}</td><td>${escape(text)}</td></tr>`
  })
  return `<h3>Parameters</h3><table>${rows.join('')}</table>`
}

function mediaHtml(what: string, type: string, media: OpenAPIV3_1.MediaTypeObject): string {
  const schema = JSON.stringify(media.schema ?? {}, null, 2)
  return `<h3>${escape(what)} <code>${escape(type)}</code></h3><pre>${escape(schema)}</pre>`
}

function answersHtml(responses: OpenAPIV3_1.ResponsesObject): string {
  const rows = Object.entries(responses).map(([status, answer]) => {
    const { description, content = {} } = answer as OpenAPIV3_1.ResponseObject
    const types = Object.keys(content).map((type) => `<code>${escape(type)}</code>`)
    return `<tr><td><code>${escape(status)}</code></td><td>${escape(description)}</td><td>${types.join(' ')}</td></tr>`
  })
  const shown = Object.entries(responses)
    .filter(([status]) => status.startsWith('2'))
    .flatMap(([status, answer]) =>
      Object.entries((answer as OpenAPIV3_1.ResponseObject).content ?? {}).map(([type, media]) =>
        mediaHtml(`Answer ${status}`, type, media),
      ),
    )
  return `<h3>Answers</h3><table>${rows.join('')}</table>${shown.join('')}`
}

const ESCAPES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
}

function escape(text: string): string {
  return text.replace(/[&<>"']/g, (character) => ESCAPES[character]!)
}
