// The database of a start: one of ours under the data folder, or the one that DATABASE_URL names.
import fs from 'node:fs'
import path from 'node:path'
import { findPostgres, installPostgres } from '../../db/server/binaries.mjs'
import { initCluster, runningServer, startCluster } from '../../db/server/cluster.mjs'
import { choosePort } from './ports.mjs'
import { ensureSecrets } from './secrets.mjs'

/**
 * @typedef {object} Store
 * @property {Record<string, string>} env DATABASE_URL, DATABASE_OWNER_URL
 * @property {import('../../db/server/cluster.mjs').Cluster | null} cluster
 * @property {() => Promise<import('../../db/server/cluster.mjs').Cluster>} [restart]
 * @property {string} words
 */

/** Finds PostgreSQL or installs it; nothing to do with DATABASE_URL. @param {string} dataDir @param {(line: string) => void} say */
export async function ensurePostgres(dataDir, say) {
  if (process.env.DATABASE_URL) return null
  return findPostgres(dataDir) ?? (await installPostgres({ dataDir, say }))
}

/**
 * Starts the database and makes roles and database where missing (needs the npm packages).
 * @param {{ dataDir: string, binaries: import('../../db/server/binaries.mjs').Binaries | null, say: (line: string) => void }} options
 * @returns {Promise<Store>}
 */
export async function openStore({ dataDir, binaries, say }) {
  if (!binaries) {
    const url = /** @type {string} */ (process.env.DATABASE_URL)
    return {
      env: { DATABASE_URL: url, DATABASE_OWNER_URL: process.env.DATABASE_OWNER_URL ?? url },
      cluster: null,
      words: 'the database of DATABASE_URL',
    }
  }
  const secrets = ensureSecrets(dataDir)
  const dir = path.join(dataDir, 'postgres')
  await initCluster({ binaries, dir, superuserPassword: secrets.superuserPassword, throwAway: false })
  const port =
    runningServer(dir)?.port ??
    (await choosePort({
      name: 'PG_PORT',
      asked: process.env.PG_PORT,
      fallback: 54329,
      host: '127.0.0.1',
      say,
    }))
  fs.mkdirSync(path.join(dataDir, 'log'), { recursive: true })
  const start = () =>
    startCluster({ binaries, dir, port, logFile: path.join(dataDir, 'log', 'postgres.log') })
  const cluster = await start()
  const { bootstrapDatabase } = await import('../../db/server/bootstrap.mjs')
  const at = `127.0.0.1:${port}`
  await bootstrapDatabase({
    superuserUrl: `postgres://postgres:${secrets.superuserPassword}@${at}/postgres`,
    databaseName: 'ebbmark',
    ownerPassword: secrets.ownerPassword,
    appPassword: secrets.appPassword,
  })
  return {
    env: {
      DATABASE_URL: `postgres://ebbmark_app:${secrets.appPassword}@${at}/ebbmark`,
      DATABASE_OWNER_URL: `postgres://ebbmark_owner:${secrets.ownerPassword}@${at}/ebbmark`,
    },
    cluster,
    restart: start,
    words: `PostgreSQL ${cluster.adopted ? 'adopted' : 'started'} on 127.0.0.1:${port} (${binaries.origin})`,
  }
}
