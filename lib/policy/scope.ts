import type { Membership, Role } from './roles'

declare const made: unique symbol

/**
 * The rows a transaction may see. Only `scopeOf` and `wallScopeOf` make one, so a query that forgets to ask sees nothing.
 * `hidesSinglePerson` keeps live values of single-person rooms from tenants and from wall screens.
 */
export type Scope = {
  readonly [made]: true
  readonly userId: number
  readonly organizationId: number
  readonly roles: readonly Role[]
  readonly buildingIds: readonly number[] | null
  readonly tenancyId: number | null
  readonly hidesSinglePerson: boolean
}

const seesSinglePersonRooms: readonly Role[] = ['administrator', 'operator', 'engineer', 'installer']

/**
 * The scope of one membership. A tenant without a tenancy gets tenancy 0, which no row has.
 * Someone who is a tenant and nothing else never sees beyond the tenancy.
 */
export function scopeOf(membership: Membership): Scope {
  const onlyTenant = membership.roles.every((role) => role === 'tenant')
  return {
    userId: membership.userId,
    organizationId: membership.organizationId,
    roles: membership.roles,
    buildingIds: membership.buildingIds,
    tenancyId: membership.tenancyId ?? (onlyTenant ? 0 : null),
    hidesSinglePerson:
      membership.tenancyId !== null || !membership.roles.some((role) => seesSinglePersonRooms.includes(role)),
  } as Scope
}

/** The same scope for a screen on a wall, where anyone may look: no live value of a single-person room. */
export function wallScopeOf(scope: Scope): Scope {
  return { ...scope, hidesSinglePerson: true }
}
