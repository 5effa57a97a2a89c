import type { FastifyPluginAsyncZod } from 'fastify-type-provider-zod'
import { RemedyOut, SwitchingOut, TestOut, TimetableOut, TripOut } from '../../core/contract/index.ts'
import { recordRoutes } from './records.ts'
import type { Rooms } from './shared.ts'

/** Trips, switchings, timetables, tests and remedies: the same operations for each. */
export function recordKindsRoutes(rooms: Rooms): FastifyPluginAsyncZod {
  return async (app) => {
    await app.register(
      recordRoutes(rooms, {
        kind: 'trip',
        path: 'trips',
        one: 'a trip',
        out: TripOut,
        mayPost: ['owner', 'logger', 'occupant'],
      }),
    )
    await app.register(
      recordRoutes(rooms, {
        kind: 'switching',
        path: 'switchings',
        one: 'a switching',
        out: SwitchingOut,
        mayPost: ['owner', 'logger'],
      }),
    )
    await app.register(
      recordRoutes(rooms, {
        kind: 'timetable',
        path: 'timetables',
        one: 'a timetable',
        out: TimetableOut,
        mayPost: ['owner'],
      }),
    )
    await app.register(
      recordRoutes(rooms, { kind: 'test', path: 'tests', one: 'a test', out: TestOut, mayPost: ['owner'] }),
    )
    await app.register(
      recordRoutes(rooms, { kind: 'remedy', path: 'remedies', one: 'a remedy', out: RemedyOut, mayPost: ['owner'] }),
    )
  }
}
