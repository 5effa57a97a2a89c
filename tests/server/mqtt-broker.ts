import { once } from 'node:events'
import { type AddressInfo, createServer, type Server, type Socket } from 'node:net'
import { createServer as createTlsServer } from 'node:tls'
import { Aedes } from 'aedes'
import mqtt, { type MqttClient } from 'mqtt'

/** A real broker on a port of its own that keeps its sessions while it is down. */
export interface Broker {
  readonly port: number
  readonly aedes: Aedes
  /** Messages that were acknowledged by whoever listens. */
  readonly acknowledged: () => number
  /** Breaks every connection and listens no more. */
  down(): Promise<void>
  /** Listens on the same port again. */
  up(): Promise<void>
  close(): Promise<void>
}

export interface BrokerOptions {
  readonly authenticate?: (user: string | undefined, password: string | undefined) => boolean
  readonly tls?: { readonly key: string; readonly cert: string }
}

export async function startBroker({ authenticate, tls }: BrokerOptions = {}): Promise<Broker> {
  const aedes = await Aedes.createBroker()
  if (authenticate) {
    aedes.authenticate = (_client, user, password, done) =>
      done(null, authenticate(user ?? undefined, password?.toString()))
  }
  let acknowledged = 0
  aedes.on('ack', () => {
    acknowledged++
  })
  const sockets = new Set<Socket>()
  let server: Server
  let port = 0
  const listen = async (): Promise<void> => {
    server = tls ? createTlsServer(tls, aedes.handle) : createServer(aedes.handle)
    server.on('connection', (socket: Socket) => {
      sockets.add(socket)
      socket.on('close', () => sockets.delete(socket))
    })
    server.listen(port, '127.0.0.1')
    await once(server, 'listening')
    port = (server.address() as AddressInfo).port
  }
  const down = async (): Promise<void> => {
    const closed = once(server, 'close')
    server.close()
    for (const socket of sockets) socket.destroy()
    await closed
  }
  await listen()
  return {
    get port() {
      return port
    },
    aedes,
    acknowledged: () => acknowledged,
    down,
    up: listen,
    close: async () => {
      await down()
      await new Promise<void>((done) => aedes.close(done))
    },
  }
}

/** A gateway that publishes with QoS 1 and repeats until the broker has it. */
export async function connectGateway(port: number, options: mqtt.IClientOptions = {}): Promise<MqttClient> {
  return mqtt.connectAsync(`mqtt://127.0.0.1:${port}`, { reconnectPeriod: 30, ...options })
}

/** Publishes with QoS 1, again where the connection broke before the broker had it: gateways do so. */
export async function publishSurely(client: MqttClient, topic: string, payload: string | Buffer): Promise<void> {
  for (;;) {
    try {
      await client.publishAsync(topic, payload, { qos: 1 })
      return
    } catch (error) {
      if (!(error instanceof Error && /closed|disconnect/i.test(error.message))) throw error
      await new Promise((done) => setTimeout(done, 20))
    }
  }
}

/** Waits until something holds. */
export async function until(holds: () => boolean | Promise<boolean>, what: string, patienceMs = 15_000): Promise<void> {
  const start = performance.now()
  while (!(await holds())) {
    if (performance.now() - start > patienceMs) throw new Error(`waited in vain: ${what}`)
    await new Promise((done) => setTimeout(done, 10))
  }
}
