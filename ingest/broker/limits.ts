/** Bounds that keep one device, or a stranger, from harming the others. */
export const LIMITS = {
  /** a packet of a signed-in device that is larger closes its connection; one below that has too large a payload is refused alone */
  packetMaxBytes: 2 * 1024 * 1024,
  /** the same before sign-in, where only a CONNECT may come */
  connectPacketMaxBytes: 16 * 1024,
  /** a connection that sends no CONNECT by then is closed */
  connectTimeoutMs: 10_000,
  /** TCP asks a silent peer from then on whether it is still there, also where the device set no keep-alive */
  tcpKeepAliveMs: 60_000,
  connections: 20_000,
  /** connects waiting to be accepted */
  backlog: 4096,
  /** the connected devices are checked against the database this often, should a notice have been lost */
  recheckMs: 60_000,
  /** failed connects of one address and user name in a minute before it is refused unread */
  failedConnectsPerMinute: 10,
  /** a failed connect is answered this late, so that a device in a loop does not spin */
  failedConnectAnswerMs: 300,
  /** readings a sensor may send at once before its rate counts, in seconds of that rate (a backlog after an outage) */
  burstSeconds: 60,
} as const
