// Roles and database of a cluster of ours: an owner for migrations, the application role, one database. Needs pg installed.
import pg from 'pg'

/**
 * Makes owner, application role and database where they are missing, and sets their passwords. Safe to run again.
 * @param {{ superuserUrl: string, databaseName: string, ownerPassword: string | null, appPassword: string | null }} options
 */
export async function bootstrapDatabase({ superuserUrl, databaseName, ownerPassword, appPassword }) {
  const client = new pg.Client({ connectionString: superuserUrl })
  await client.connect()
  try {
    await role(client, 'ebbmark_owner', 'LOGIN CREATEROLE CREATEDB', ownerPassword)
    await role(client, 'ebbmark_app', 'LOGIN', appPassword)
    const exists = await client.query('SELECT 1 FROM pg_database WHERE datname = $1', [databaseName])
    if (exists.rowCount === 0)
      await client.query(`CREATE DATABASE ${client.escapeIdentifier(databaseName)} OWNER ebbmark_owner`)
  } finally {
    await client.end()
  }
}

/**
 * @param {pg.Client} client
 * @param {string} name
 * @param {string} rights
 * @param {string | null} password
 */
async function role(client, name, rights, password) {
  const known = await client.query('SELECT 1 FROM pg_roles WHERE rolname = $1', [name])
  if (known.rowCount === 0) await client.query(`CREATE ROLE ${name} NOSUPERUSER NOBYPASSRLS`)
  await client.query(
    `ALTER ROLE ${name} ${rights}${password === null ? '' : ` PASSWORD ${client.escapeLiteral(password)}`}`,
  )
}
