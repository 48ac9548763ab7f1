/** The grammar of MQTT topics, version 1: `ebbmark/v1/{site}/{device}/{leaf}`. */

/** What a device publishes under its own address: a sensor readings and status, an air handler's gateway supply and status. */
export const TOPIC_LEAVES = ['readings', 'status', 'supply'] as const
export type TopicLeaf = (typeof TOPIC_LEAVES)[number]

export type Topic = { site: string; device: string; leaf: TopicLeaf }

const deviceIdPattern = /^[A-Za-z0-9._:-]{1,64}$/
const sitePattern = /^[a-z0-9](?:[a-z0-9-]{0,62}[a-z0-9])?$/
const prefix = 'ebbmark/v1/'

/** True where the text may be a device id: 1 to 64 of letters, digits, `.`, `_`, `:` and `-`. */
export function isDeviceId(text: string): boolean {
  return deviceIdPattern.test(text)
}

/** True where the text may be a building's slug, the {site} of topics: lower-case letters, digits and inner hyphens. */
export function isSite(text: string): boolean {
  return sitePattern.test(text)
}

/** The form in which device ids are compared and kept unique: without case. */
export function deviceIdKey(deviceId: string): string {
  return deviceId.toLowerCase()
}

/** Takes a topic apart, or undefined where it is none of this grammar (wildcards included). */
export function parseTopic(topic: string): Topic | undefined {
  if (!topic.startsWith(prefix)) return undefined
  const [site, device, leaf, ...rest] = topic.slice(prefix.length).split('/')
  if (rest.length > 0 || !site || !device || !isSite(site) || !isDeviceId(device)) return undefined
  return isLeaf(leaf) ? { site, device, leaf } : undefined
}

function isLeaf(text: string | undefined): text is TopicLeaf {
  return (TOPIC_LEAVES as readonly (string | undefined)[]).includes(text)
}

/** The topic a device publishes to, e.g. `topicOf('mill', 'r01', 'readings')` is `ebbmark/v1/mill/r01/readings`. */
export function topicOf(site: string, device: string, leaf: TopicLeaf): string {
  return `${prefix}${site}/${device}/${leaf}`
}

/**
 * User name and client id of an air handler's gateway: `{site}/{code}`. No device id holds a slash, so the two kinds cannot be
 * mistaken for each other.
 */
export function gatewayUserName(site: string, airHandlerCode: string): string {
  return `${site}/${airHandlerCode}`
}

export type UserName = { kind: 'sensor'; key: string } | { kind: 'gateway'; site: string; codeKey: string }

/** Says whose user name this is (keys are without case), or undefined where no device can have it. */
export function parseUserName(userName: string): UserName | undefined {
  const slash = userName.indexOf('/')
  if (slash < 0) return isDeviceId(userName) ? { kind: 'sensor', key: deviceIdKey(userName) } : undefined
  const site = userName.slice(0, slash).toLowerCase()
  const code = userName.slice(slash + 1)
  return isSite(site) && isDeviceId(code) ? { kind: 'gateway', site, codeKey: deviceIdKey(code) } : undefined
}
