import compress from '@fastify/compress'
import fp from 'fastify-plugin'
import { ProblemError } from './problem-error.ts'

/** The largest body of readings, unpacked. */
export const MAX_READINGS_BYTES: number = 32 * 1024 * 1024
/** The largest body of anything else. */
export const MAX_BODY_BYTES: number = 4 * 1024 * 1024

/** JSON in its media types, CBOR as bytes for intake to read, gzip and deflate both ways. The size of a body counts unpacked. */
export const bodiesPlugin = fp(
  async (app) => {
    await app.register(compress, {
      requestEncodings: ['gzip', 'deflate', 'identity'],
      encodings: ['gzip', 'deflate', 'identity'],
      threshold: 2_048,
    })
    const parse = app.getDefaultJsonParser('error', 'error')
    const types = [
      'application/json',
      'application/senml+json',
      'application/sensml+json',
      'application/merge-patch+json',
    ]
    app.removeContentTypeParser(['application/json', 'text/plain'])
    app.addContentTypeParser<string>(types, { parseAs: 'string' }, (request, body, done) => {
      // Some clients announce JSON on a DELETE and send none.
      if (body === '' && request.method === 'DELETE') done(null, undefined)
      else parse(request, body, done)
    })
    app.addContentTypeParser<Buffer>(
      ['application/senml+cbor', 'application/sensml+cbor'],
      { parseAs: 'buffer' },
      (_request, body, done) => done(null, body),
    )
    app.addHook('preValidation', async (request) => {
      const awaited = !request.is404 && ['POST', 'PATCH', 'PUT'].includes(request.method)
      if (awaited && request.body === undefined) {
        throw new ProblemError('malformed-request', 'This call needs a JSON body with its Content-Type.')
      }
    })
  },
  { name: 'bodies', dependencies: ['problems'] },
)
