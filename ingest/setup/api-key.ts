/** npm run api-key -- --building SLUG --name NAME: makes an API key that may send readings of one building's sensors; printed once. */
import { parseArgs } from 'node:util'
import { createApiKey } from '@/db/changes/api-keys'
import { listBuildings } from '@/db/queries/building-plan'
import { systemClock } from '@/lib/server/clock'
import { database } from '@/lib/server/database'
import { publicUrl } from '@/lib/server/env'

const USAGE = `usage: npm run api-key -- --building BUILDING --name NAME
  --building  the building's short name as in its MQTT topics, e.g. sallow-mill
  --name      what people call the key, e.g. "gateway in the plant room"`

/** What the person who typed can mend: told in one line, exit 2. */
class Mistake extends Error {}

function argumentsOf(argv: string[]): { slug: string; name: string } {
  const options = { building: { type: 'string' }, name: { type: 'string' } } as const
  try {
    const { values } = parseArgs({ args: argv, options, allowPositionals: false })
    const name = values.name?.trim()
    if (!values.building || !name) throw new Mistake(`--building and --name are both needed\n${USAGE}`)
    if (name.length > 80) throw new Mistake('--name: expected at most 80 signs')
    return { slug: values.building, name }
  } catch (error) {
    throw error instanceof Mistake ? error : new Mistake(`${(error as Error).message}\n${USAGE}`)
  }
}

async function main(argv: string[]): Promise<void> {
  const { slug, name } = argumentsOf(argv)
  const made = await database().asSystem('api-key command', async (tx) => {
    const buildings = await listBuildings(tx)
    const building = buildings.find((each) => each.slug === slug)
    if (!building) {
      const known = buildings.map((each) => each.slug).join(', ')
      throw new Mistake(`--building ${slug}: there is no such building; known are: ${known || 'none yet'}`)
    }
    const { organizationId, id: buildingId } = building
    const scopes = ['readings.write'] as const
    return createApiKey(tx, {
      organizationId,
      buildingId,
      userId: null,
      name,
      scopes,
      now: systemClock.now(),
    })
  })
  process.stdout.write(`${made.key}\n`)
  process.stderr.write(
    `This key of ${slug} is shown once; keep it where only the gateway reads it. Send readings with\n  POST ${publicUrl()}/api/v1/readings\n  Authorization: Bearer ${made.key.slice(0, 10)}…\n`,
  )
}

main(process.argv.slice(2))
  .catch((error) => {
    process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
    process.exitCode = error instanceof Mistake ? 2 : 1
  })
  .finally(() => database().close())
