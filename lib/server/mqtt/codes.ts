/** CONNACK codes of MQTT 3.1.1 §3.2.2.3 in words. */
const connackWords: Record<number, string> = {
  1: 'the broker does not speak this version of MQTT',
  2: 'the broker does not accept the client id',
  3: 'the broker is not available just now',
  4: 'the broker does not accept user name or password',
  5: 'the broker does not authorise this user',
}

/** Reason codes of MQTT 5 §2.4 in words, those that a subscriber can meet. */
const reasonWords: Record<number, string> = {
  128: 'the broker gave no reason',
  129: 'the broker found a malformed packet',
  130: 'the broker found a protocol error',
  131: 'the broker refused for a reason of its own',
  132: 'the broker does not speak this version of MQTT',
  133: 'the broker does not accept the client id',
  134: 'the broker does not accept user name or password',
  135: 'the broker does not authorise this user',
  136: 'the broker is not available just now',
  137: 'the broker is busy',
  138: 'the broker has banned this client',
  139: 'the broker shuts down',
  141: 'the broker heard nothing within the keep-alive',
  142: 'another process has connected with the same client id',
  143: 'the broker does not accept the topic filter',
  147: 'the broker found more unacknowledged messages than agreed',
  151: 'a quota of the broker is used up',
  152: 'an administrator of the broker has ended the connection',
  156: 'the broker asks to use another server',
  157: 'the broker has moved to another server',
  158: 'the broker does not offer shared subscriptions',
  159: 'the broker takes no more connections for now',
  161: 'the broker does not offer subscription identifiers',
  162: 'the broker does not offer wildcards in subscriptions',
}

/** Says what a refused connect means. */
export function connackInWords(code: number): string {
  return connackWords[code] ?? reasonInWords(code)
}

/** Says what a reason code of MQTT 5 means. */
export function reasonInWords(code: number): string {
  return reasonWords[code] ?? `the broker answered with reason code 0x${code.toString(16)}`
}

/** True where the broker speaks only an older version of MQTT. */
export function isOlderBroker(code: number): boolean {
  return code === 1 || code === 0x84
}
