import type pg from 'pg'

/** A sensor or an air handler's gateway as the broker knows it. `userName` is its client id too, compared without case. */
export type Device = {
  kind: 'sensor' | 'gateway'
  /** sensors.id, or air_handlers.id of a gateway */
  id: number
  organizationId: number
  buildingId: number
  /** the building's slug, the {site} of topics */
  site: string
  /** device id, or the air handler's code: the second variable level of topics */
  deviceId: string
  userName: string
  secretSha256: string
  retired: boolean
}

/** Sensors by the keys of their device ids (lower case). */
export async function findSensorDevices(client: pg.ClientBase, keys: readonly string[]): Promise<Device[]> {
  const found = await client.query<Device>(
    `SELECT 'sensor' AS kind, s.id, s.organization_id AS "organizationId", s.building_id AS "buildingId", b.slug AS site,
       s.device_id AS "deviceId", s.device_id AS "userName", s.secret_sha256 AS "secretSha256",
       (s.retired_at IS NOT NULL AND s.retired_at <= now()) AS retired
     FROM sensors s JOIN buildings b ON b.id = s.building_id WHERE s.device_id_key = ANY($1::text[])`,
    [keys],
  )
  return found.rows
}

/** Gateways by `{site}/{code}` in lower case; those without a secret do not exist for the broker. */
export async function findGatewayDevices(
  client: pg.ClientBase,
  userNames: readonly string[],
): Promise<Device[]> {
  const sites = [...new Set(userNames.map((name) => name.slice(0, name.indexOf('/'))))]
  const found = await client.query<Device>(
    `SELECT 'gateway' AS kind, a.id, a.organization_id AS "organizationId", a.building_id AS "buildingId", b.slug AS site,
       a.code AS "deviceId", b.slug || '/' || a.code AS "userName", a.secret_sha256 AS "secretSha256", false AS retired
     FROM air_handlers a JOIN buildings b ON b.id = a.building_id
     WHERE b.slug = ANY($1::text[]) AND a.secret_sha256 IS NOT NULL AND lower(b.slug || '/' || a.code) = ANY($2::text[])`,
    [sites, userNames],
  )
  return found.rows
}
