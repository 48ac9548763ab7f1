// One start per data folder: whoever holds the unix socket in it is the running one, and says where it is reached.
import fs from 'node:fs'
import net from 'node:net'
import path from 'node:path'

/** @typedef {{ pid: number, url: string | null }} Running */

/**
 * Takes the data folder. Answers the running start when there is one; a socket that nobody answers is stale and taken over.
 * @param {string} dataDir
 * @param {() => Running} describe
 * @returns {Promise<{ running: Running } | { release: () => void }>}
 */
export async function takeDataDir(dataDir, describe) {
  fs.mkdirSync(dataDir, { recursive: true })
  const file = path.join(dataDir, 'start.sock')
  // a unix socket's path may have 107 bytes at most: bind by its short name from inside the folder
  const back = process.cwd()
  for (let tries = 0; tries < 3; tries++) {
    process.chdir(dataDir)
    const server = await listen(describe)
    process.chdir(back)
    if (server) {
      return {
        release: () => {
          server.close()
          fs.rmSync(file, { force: true })
        },
      }
    }
    process.chdir(dataDir)
    const running = await ask()
    process.chdir(back)
    if (running) return { running }
    fs.rmSync(file, { force: true })
  }
  throw new Error(
    `The data folder ${dataDir} could not be taken: another start is taking it in this moment. Try again.`,
  )
}

/** @param {() => Running} describe @returns {Promise<net.Server | null>} */
function listen(describe) {
  return new Promise((resolve, reject) => {
    const server = net.createServer((socket) =>
      socket.on('error', () => undefined).end(JSON.stringify(describe())),
    )
    server.once('error', (/** @type {NodeJS.ErrnoException} */ error) =>
      error.code === 'EADDRINUSE' ? resolve(null) : reject(error),
    )
    server.listen('start.sock', () => {
      fs.chmodSync('start.sock', 0o600)
      server.unref()
      resolve(server)
    })
  })
}

/** @returns {Promise<Running | null>} */
function ask() {
  return new Promise((resolve) => {
    let said = ''
    const socket = net.connect('start.sock')
    socket.setTimeout(3000, () => socket.destroy())
    socket.on('data', (chunk) => (said += chunk))
    socket.on('error', () => resolve(null))
    socket.on('close', () => {
      try {
        resolve(JSON.parse(said))
      } catch {
        resolve(null)
      }
    })
  })
}
