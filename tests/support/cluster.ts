import fs from 'node:fs'
import net from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { findPostgres, installPostgres } from '@/db/server/binaries.mjs'
import { bootstrapDatabase } from '@/db/server/bootstrap.mjs'
import { type Cluster, initCluster, startCluster } from '@/db/server/cluster.mjs'

/** A free loopback port. */
export function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = net.createServer()
    server.once('error', reject)
    server.listen(0, '127.0.0.1', () => {
      const { port } = server.address() as net.AddressInfo
      server.close(() => resolve(port))
    })
  })
}

/**
 * A throw-away cluster of its own with the roles of the product, trust authentication on loopback. For tests that stop or kill
 * PostgreSQL; all others share the one of the run through createTestDatabase.
 */
export async function startThrowAwayCluster(): Promise<
  Cluster & { superuserUrl: string; restart: () => Promise<void>; remove: () => Promise<void> }
> {
  const dir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-pg-'))
  fs.chmodSync(dir, 0o755)
  const binaries = findPostgres(dir) ?? (await installPostgres({ dataDir: dir, say: () => undefined }))
  const data = path.join(dir, 'data')
  await initCluster({ binaries, dir: data, superuserPassword: null, throwAway: true })
  const port = await freePort()
  let cluster = await startCluster({ binaries, dir: data, port, logFile: path.join(dir, 'log') })
  const superuserUrl = `postgres://postgres@127.0.0.1:${port}/postgres`
  await bootstrapDatabase({ superuserUrl, databaseName: 'ebbmark', ownerPassword: null, appPassword: null })
  return {
    ...cluster,
    superuserUrl,
    stop: () => cluster.stop(),
    restart: async () => {
      cluster = await startCluster({ binaries, dir: data, port, logFile: path.join(dir, 'log') })
    },
    remove: async () => {
      await cluster.stop()
      fs.rmSync(dir, { recursive: true, force: true })
    },
  }
}
