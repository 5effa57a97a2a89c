import type { Socket } from 'node:net'
import { ProblemError } from './problem-error.ts'
import { problemDocument } from './problems.ts'

/** Answers what is no HTTP at all, before there is any request to speak of. */
export function answerUnparsed(error: Error & { readonly code?: string }, socket: Socket): void {
  if (error.code === 'ECONNRESET' || !socket.writable) {
    socket.destroy()
    return
  }
  const problem =
    error.code === 'HPE_HEADER_OVERFLOW'
      ? new ProblemError('headers-too-large', 'The header fields are too large.')
      : new ProblemError('malformed-request', 'This is not a request that HTTP knows, or it came too slowly.')
  const body = JSON.stringify(problemDocument(problem, 'GET'))
  socket.end(
    `HTTP/1.1 ${problem.statusCode} Refused\r\nContent-Type: application/problem+json\r\n` +
      `Content-Length: ${Buffer.byteLength(body)}\r\nConnection: close\r\n\r\n${body}`,
  )
}
