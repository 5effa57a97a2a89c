import { START_MS, seeded } from './bakehouse.ts'
import { Client } from './client.ts'

interface Batch {
  readonly channel: string
  readonly t: readonly number[]
  readonly v: readonly number[]
}

interface Trip {
  readonly rcd: string
  readonly at: string
  readonly note: string
}

interface ReadingsAnswer {
  readonly stored: number
  readonly repeated: number
  readonly conflicting: number
  readonly refused: readonly unknown[]
}

interface TripsAnswer {
  readonly stored: number
  readonly repeated: number
  readonly ids: readonly string[]
}

const BATCH = 40
const CHANNELS = ['tails-a', 'leak-7']

/** What a logger that never forgets has posted: what was answered, and what has to be posted again. */
export class Ledger {
  readonly answered: Batch[] = []
  readonly answeredTrips: Trip[] = []
  private unanswered: Batch[] = []
  private unansweredTrips: Trip[] = []
  readonly site: string
  private readonly random: () => number
  private made = 0

  constructor(site: string, seed: number) {
    this.site = site
    this.random = seeded(seed)
  }

  /** Posts until the connection breaks or the server says that it is going. */
  async postUntilBroken(url: string): Promise<void> {
    const client = new Client(url)
    const readings = async (): Promise<void> => {
      for (let going = true; going; ) going = await this.postBatch(client, this.nextBatch())
    }
    const trips = async (): Promise<void> => {
      for (let going = true; going; ) going = await this.postTrip(client, this.nextTrip())
    }
    await Promise.all([readings(), readings(), readings(), trips()])
  }

  /**
   * Posts again what was not answered. A batch is one transaction, so it is there whole or not at all.
   * @returns what each answer was, for the test to judge
   */
  async repeatUnanswered(url: string): Promise<{ readonly whole: boolean; readonly again: boolean }[]> {
    const client = new Client(url)
    const batches = this.unanswered.splice(0)
    const trips = this.unansweredTrips.splice(0)
    const seen: { whole: boolean; again: boolean }[] = []
    for (const batch of batches) {
      const first = await this.readingsAnswer(client, batch)
      const second = await this.readingsAnswer(client, batch)
      this.answered.push(batch)
      seen.push({
        whole: (first.stored === BATCH || first.repeated === BATCH) && first.stored + first.repeated === BATCH,
        again: second.repeated === BATCH && second.stored === 0 && second.conflicting === 0,
      })
    }
    for (const trip of trips) {
      const first = await this.tripsAnswer(client, trip)
      const second = await this.tripsAnswer(client, trip)
      this.answeredTrips.push(trip)
      seen.push({
        whole: first.stored + first.repeated === 1,
        again: second.repeated === 1 && second.stored === 0 && second.ids[0] === first.ids[0],
      })
    }
    return seen
  }

  /** Every reading of a channel that was answered, by time. */
  expected(channel: string): [number, number][] {
    return this.answered
      .filter((batch) => batch.channel === channel)
      .flatMap((batch) => batch.t.map((t, i): [number, number] => [t, batch.v[i]!]))
      .sort(([a], [b]) => a - b)
  }

  private async postBatch(client: Client, batch: Batch): Promise<boolean> {
    const answer = await client.post<ReadingsAnswer>(`/sites/${this.site}/readings`, { blocks: [batch] })
    if (answer?.status === 200) {
      this.answered.push(batch)
      return true
    }
    this.unanswered.push(batch)
    return stopped(answer)
  }

  private async postTrip(client: Client, trip: Trip): Promise<boolean> {
    const answer = await client.post<TripsAnswer>(`/sites/${this.site}/trips`, trip)
    if (answer !== undefined && answer.status < 300) {
      this.answeredTrips.push(trip)
      return true
    }
    this.unansweredTrips.push(trip)
    return stopped(answer)
  }

  private async readingsAnswer(client: Client, batch: Batch): Promise<ReadingsAnswer> {
    const answer = await client.post<ReadingsAnswer>(`/sites/${this.site}/readings`, { blocks: [batch] })
    if (answer?.status !== 200) throw new Error(`a repeated batch was answered ${JSON.stringify(answer)}`)
    return answer.body
  }

  private async tripsAnswer(client: Client, trip: Trip): Promise<TripsAnswer> {
    const answer = await client.post<TripsAnswer>(`/sites/${this.site}/trips`, trip)
    if (answer === undefined || answer.status >= 300) throw new Error(`a trip was answered ${JSON.stringify(answer)}`)
    return answer.body
  }

  /** Times never used before, some of them late and unsorted, across hours, as loggers send them. */
  private nextBatch(): Batch {
    const number = this.made++
    const hour = number % 3 === 0 ? 0 : Math.floor(number / 50)
    const t = Array.from({ length: BATCH }, (_, i) => START_MS + hour * 3_600_000 + i * 10_000 + number)
    if (number % 2 === 0) t.reverse()
    const v = t.map(() => Math.round(this.random() * 2_000) / 100)
    return { channel: CHANNELS[number % CHANNELS.length]!, t, v }
  }

  private nextTrip(): Trip {
    const number = this.made++
    return { rcd: 'A', at: new Date(START_MS + number * 60_000).toISOString(), note: `trip ${number}` }
  }
}

/** Goes on never; a connection that broke and 503 are how a server goes, anything else is a fault of the test's subject. */
function stopped(answer: { readonly status: number; readonly body: unknown } | undefined): false {
  if (answer === undefined || answer.status === 503) return false
  throw new Error(`a post was answered ${answer.status}: ${JSON.stringify(answer.body)}`)
}
