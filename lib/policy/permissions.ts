import type { Role } from './roles'

type Entry = { readonly says: string; readonly roles: readonly Role[] }

const everyone: readonly Role[] = ['administrator', 'operator', 'engineer', 'installer', 'tenant']

/**
 * Every permission: one sentence, and the roles that hold it. Which rows a holder sees is the scope's business (buildings,
 * tenancy, single-person rooms), not this table's.
 */
const table = {
  'self.manage': { says: 'See and end the own sessions.', roles: everyone },
  'rounds.read': { says: 'Walk the live board of rooms.', roles: ['administrator', 'operator'] },
  'room.read': {
    says: 'Open a room: its record, its verdict and what its ventilation supports.',
    roles: ['administrator', 'operator', 'engineer', 'tenant'],
  },
  'air-change.read': {
    says: 'See every room’s air-change rate against its basis.',
    roles: ['administrator', 'engineer'],
  },
  'decay.read': { says: 'See a decay, its fit and its checks.', roles: ['administrator', 'engineer'] },
  'decay.review': {
    says: 'Keep a decay, leave it out or move its window, with a reason.',
    roles: ['engineer'],
  },
  'sensor.read': {
    says: 'See sensors, their standing and their places.',
    roles: ['administrator', 'operator', 'engineer', 'installer'],
  },
  'sensor.register': {
    says: 'Register a sensor, place it and receive its secret once.',
    roles: ['administrator', 'installer'],
  },
  'digest.read': {
    says: 'Read the weekly digest of a tenancy.',
    roles: ['administrator', 'operator', 'tenant'],
  },
  'digest.send': {
    says: 'Send a weekly digest to its receivers now.',
    roles: ['administrator', 'operator'],
  },
  'mailbox.read': {
    says: 'Open the local mailbox of the demo.',
    roles: ['administrator', 'operator'],
  },
  'settings.manage': {
    says: 'Change people, buildings, rooms, limits and bases.',
    roles: ['administrator'],
  },
  'api.live': { says: 'Receive live values of the rooms and sensors in scope.', roles: everyone },
} as const satisfies Record<string, Entry>

export type Permission = keyof typeof table

/** What a page, handler or action names when nobody needs to be signed in. */
export type PermissionOrOpen = Permission | 'open'

export const PERMISSIONS: Readonly<Record<Permission, Entry>> = table

/** May someone with these roles do this? */
export function can(roles: readonly Role[], permission: Permission): boolean {
  return roles.some((role) => PERMISSIONS[permission].roles.includes(role))
}

/** The words for a person who may not: which roles hold the permission. */
export function whoMay(permission: Permission): string {
  const holders = PERMISSIONS[permission].roles
  return holders.length === 1 ? `the role ${holders[0]}` : `one of the roles ${holders.join(', ')}`
}
