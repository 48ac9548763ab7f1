import type { AuthenticateError, Client } from 'aedes'
import { isDeviceSecret } from '@/db/device-secret'
import type { Device } from '@/db/queries/devices'
import type { RefusalReason } from '@/lib/wire/mqtt'
import type { Credentials } from '../worker/credentials'
import type { Ingest } from '../worker/ingest'
import { pause, within } from '../worker/pause'
import { sourceOf } from '../worker/take'
import { FailedConnects } from './failed-connects'
import { LIMITS } from './limits'

/** CONNACK return codes of MQTT 3.1.1 §3.2.2.3. */
const returnCodes = { otherClientId: 2, unavailable: 3, badSecret: 4, notAuthorized: 5 } as const
type ReturnCode = (typeof returnCodes)[keyof typeof returnCodes]

type Failure = { reason: RefusalReason; code: ReturnCode; device?: Device }

/** Address of the peer, as refusals of strangers name it. */
export function addressOf(client: Client): string {
  const { conn } = client
  const address = 'remoteAddress' in conn ? conn.remoteAddress : undefined
  return (address ?? 'unknown').replace(/^::ffff:/, '')
}

/** Says who a connecting client is; every failure is recorded, and answered late. */
export class SignIn {
  readonly #failed = new FailedConnects()
  readonly #ingest: Ingest
  readonly #credentials: Credentials
  readonly #nowMs: () => number

  constructor(options: { ingest: Ingest; credentials: Credentials; nowMs: () => number }) {
    this.#ingest = options.ingest
    this.#credentials = options.credentials
    this.#nowMs = options.nowMs
  }

  /** The device, or the error whose return code goes into the CONNACK. */
  async check(
    client: Client,
    userName: string | undefined,
    secret: Uint8Array | undefined,
  ): Promise<Device | AuthenticateError> {
    if (!this.#ingest.isOpen) return refusal(returnCodes.unavailable, 'the store is away, come again')
    const name = userName ?? ''
    const address = addressOf(client)
    if (this.#failed.isLocked(address, name, this.#nowMs()))
      return this.#fail(client, name, { reason: 'too-many-failed-connects', code: returnCodes.notAuthorized })
    const found = await within(
      this.#credentials.find(name).then((device) => ({ device })),
      4000,
    ).catch(() => undefined)
    if (!found) return refusal(returnCodes.unavailable, 'the store does not answer, come again')
    const failure = failureOf(found.device, client.id, secret)
    if (failure) return this.#fail(client, name, failure)
    this.#failed.clear(address, name)
    return found.device!
  }

  /** Records a refusal of someone who is not signed in, under the address. */
  noteStranger(client: Client, reason: RefusalReason, detail: string): void {
    const source = { source: `address ${addressOf(client)}`, organizationId: null, sensorId: null }
    this.#ingest.note({ ...source, reason, detail, sample: null, receivedMs: this.#nowMs() })
  }

  async #fail(client: Client, userName: string, failure: Failure): Promise<AuthenticateError> {
    const address = addressOf(client)
    this.#failed.add(address, userName, this.#nowMs())
    const detail = `user name ${JSON.stringify(userName.slice(0, 80))}, client id ${JSON.stringify(client.id.slice(0, 80))}, from ${address}`
    if (failure.device) {
      const receivedMs = this.#nowMs()
      this.#ingest.note({
        ...sourceOf(failure.device),
        reason: failure.reason,
        detail,
        sample: null,
        receivedMs,
      })
    } else this.noteStranger(client, failure.reason, detail)
    await pause(LIMITS.failedConnectAnswerMs)
    return refusal(failure.code, failure.reason)
  }
}

function failureOf(
  device: Device | undefined,
  clientId: string,
  secret: Uint8Array | undefined,
): Failure | undefined {
  if (!device) return { reason: 'unknown-device', code: returnCodes.badSecret }
  if (!secret || !isDeviceSecret(secret, device.secretSha256))
    return { reason: 'wrong-secret', code: returnCodes.badSecret, device }
  if (device.retired) return { reason: 'retired-device', code: returnCodes.notAuthorized, device }
  if (clientId.toLowerCase() !== device.userName.toLowerCase())
    return { reason: 'other-client-id', code: returnCodes.otherClientId, device }
  return undefined
}

function refusal(returnCode: ReturnCode, message: string): AuthenticateError {
  return Object.assign(new Error(message), { returnCode }) as AuthenticateError
}
