import { startThrowAwayCluster } from './cluster'

/** One throw-away cluster for the whole run, unless TEST_OWNER_URL names one. */
export default async function setup(): Promise<(() => Promise<void>) | undefined> {
  if (process.env.TEST_OWNER_URL) return undefined
  const cluster = await startThrowAwayCluster()
  process.env.TEST_OWNER_URL = `postgres://postgres@127.0.0.1:${cluster.port}`
  return () => cluster.remove()
}
