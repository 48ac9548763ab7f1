/** The five roles; a membership holds a set of them. */
export const ROLES = ['administrator', 'operator', 'engineer', 'installer', 'tenant'] as const
export type Role = (typeof ROLES)[number]

/** What a person may do in one organisation, as stored in memberships. */
export type Membership = {
  userId: number
  organizationId: number
  roles: readonly Role[]
  /** null: every building of the organisation */
  buildingIds: readonly number[] | null
  /** null: not restricted to a tenancy */
  tenancyId: number | null
}
