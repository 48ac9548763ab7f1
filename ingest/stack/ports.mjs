// Ports: a default that is taken gives way to the next free one and is said; one that was asked for and is taken is an error.
import net from 'node:net'

/**
 * @param {string} host
 * @param {number} port
 * @returns {Promise<boolean>}
 */
export function isFree(host, port) {
  return new Promise((resolve) => {
    const server = net.createServer()
    server.once('error', () => resolve(false))
    server.listen({ host, port, exclusive: true }, () => server.close(() => resolve(true)))
  })
}

/**
 * @param {{ name: string, asked: string | undefined, fallback: number, host: string, taken?: Set<number>, say: (line: string) => void }} options
 * @returns {Promise<number>}
 */
export async function choosePort({ name, asked, fallback, host, taken = new Set(), say }) {
  if (asked) {
    const port = Number(asked)
    if (!Number.isInteger(port) || port < 1 || port > 65535)
      throw new Error(`${name}=${asked} is not a port: give a whole number from 1 to 65535.`)
    if (!(await isFree(host, port)))
      throw new Error(
        `${name}=${port} is taken on ${host}: stop what listens there, or set ${name} to another port.`,
      )
    return port
  }
  for (let port = fallback; port < fallback + 200; port++) {
    if (!taken.has(port) && (await isFree(host, port))) {
      if (port !== fallback) say(`port ${fallback} is taken: ${name} is ${port}`)
      taken.add(port)
      return port
    }
  }
  throw new Error(
    `No free port for ${name} between ${fallback} and ${fallback + 199} on ${host}: set ${name}.`,
  )
}
