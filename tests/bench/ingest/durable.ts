import pg from 'pg'

/** A throw-away cluster is careless about a power cut; what is measured must not be. */
export async function makeDurable(superuserUrl: string): Promise<void> {
  const client = new pg.Client({ connectionString: superuserUrl })
  await client.connect()
  for (const setting of ['fsync', 'full_page_writes', 'synchronous_commit'])
    await client.query(`ALTER SYSTEM SET ${setting} = on`)
  await client.query('SELECT pg_reload_conf()')
  await client.end()
}
