import { describe, expect, test } from 'vitest'
import { safeNext } from '@/lib/paths'
import { firstPageOf, navigationFor, rolesInWords } from '@/lib/policy/navigation'
import { can, PERMISSIONS, type Permission } from '@/lib/policy/permissions'
import { ROLES, type Role } from '@/lib/policy/roles'
import { scopeOf, wallScopeOf } from '@/lib/policy/scope'
import { addressIn } from '@/lib/server/auth/address'
import { ADDRESS_LIMIT, EMAIL_LIMIT, secondsToWait, waitWords, wrongWords } from '@/lib/server/auth/limits'

/** Rules of our own product (product.md's users, the words): no outside source. */
describe('the permission table', () => {
  /** Written by hand from the four users' jobs; a change of the table must be made here too. */
  const expected: Record<Permission, Role[]> = {
    'self.manage': ['administrator', 'operator', 'engineer', 'installer', 'tenant'],
    'rounds.read': ['administrator', 'operator'],
    'room.read': ['administrator', 'operator', 'engineer', 'tenant'],
    'air-change.read': ['administrator', 'engineer'],
    'decay.read': ['administrator', 'engineer'],
    'decay.review': ['engineer'],
    'sensor.read': ['administrator', 'operator', 'engineer', 'installer'],
    'sensor.register': ['administrator', 'installer'],
    'digest.read': ['administrator', 'operator', 'tenant'],
    'digest.send': ['administrator', 'operator'],
    'mailbox.read': ['administrator', 'operator'],
    'settings.manage': ['administrator'],
    'api.live': ['administrator', 'operator', 'engineer', 'installer', 'tenant'],
  }

  test.each(Object.entries(expected))('%s is held by exactly these roles', (permission, roles) => {
    const holders = ROLES.filter((role) => can([role], permission as Permission))
    expect([...holders].sort()).toEqual([...roles].sort())
  })

  test('holds no permission that is not expected here', () => {
    expect(Object.keys(PERMISSIONS).sort()).toEqual(Object.keys(expected).sort())
  })

  test('a set of roles may what any of them may, and no role may nothing', () => {
    expect(can(['installer', 'engineer'], 'decay.review')).toBe(true)
    expect(can(['installer', 'tenant'], 'decay.review')).toBe(false)
    for (const permission of Object.keys(PERMISSIONS)) expect(can([], permission as Permission)).toBe(false)
  })

  test('says each permission in one sentence', () => {
    for (const { says } of Object.values(PERMISSIONS)) expect(says).toMatch(/^[A-Z][^.]+\.$/)
  })
})

describe('the masthead', () => {
  test('shows each role the words of its work, and the first page among them', () => {
    const words = (roles: Role[]) => navigationFor(roles).map(({ word }) => word)
    expect(words(['tenant'])).toEqual(['Digests', 'Rooms'])
    expect(words(['installer'])).toEqual(['Sensors', 'Register'])
    expect(words(['operator'])[0]).toBe('Rounds')
    expect(words(['engineer']).slice(0, 2)).toEqual(['Air change', 'Decays'])
    for (const role of ROLES) {
      expect(navigationFor([role]).map(({ href }) => href)).toContain(firstPageOf([role]))
    }
  })

  test('begins at the page of the role', () => {
    expect(ROLES.map((role) => [role, firstPageOf([role])])).toEqual([
      ['administrator', '/rounds'],
      ['operator', '/rounds'],
      ['engineer', '/air-change'],
      ['installer', '/sensors'],
      ['tenant', '/digests'],
    ])
    expect(firstPageOf(['engineer', 'operator'])).toBe('/rounds')
    expect(firstPageOf([])).toBe('/sign-in')
  })

  test('names several roles as one phrase', () => {
    expect(rolesInWords(['operator', 'engineer'])).toBe('Operator and energy engineer')
    expect(rolesInWords(['tenant'])).toBe('Tenant')
  })
})

describe('a scope', () => {
  const membership = { userId: 1, organizationId: 2, buildingIds: null, tenancyId: null }

  test('of a mere tenant without a tenancy is bound to one that no row has', () => {
    expect(scopeOf({ ...membership, roles: ['tenant'] }).tenancyId).toBe(0)
    expect(scopeOf({ ...membership, roles: [] }).tenancyId).toBe(0)
    expect(scopeOf({ ...membership, roles: ['tenant', 'operator'] }).tenancyId).toBeNull()
  })

  test('hides single-person rooms from tenants, from anyone bound to a tenancy, and on a wall', () => {
    expect(scopeOf({ ...membership, roles: ['tenant'] }).hidesSinglePerson).toBe(true)
    expect(scopeOf({ ...membership, roles: ['operator'], tenancyId: 5 }).hidesSinglePerson).toBe(true)
    const operator = scopeOf({ ...membership, roles: ['operator'] })
    expect(operator.hidesSinglePerson).toBe(false)
    expect(wallScopeOf(operator).hidesSinglePerson).toBe(true)
  })
})

describe('the page after sign-in', () => {
  test.each([
    ['/decays/k7', '/decays/k7'],
    ['/air-change?sort=rate&verdict=short', '/air-change?sort=rate&verdict=short'],
    ['/rooms/a%2Fb', '/rooms/a%2Fb'],
    ['//evil.example', null],
    ['/\\evil.example', null],
    ['/\t/evil.example', null],
    ['https://evil.example', null],
    ['javascript:alert(1)', null],
    ['/api/auth/signout', null],
    ['/sign-in?next=/x', null],
    ['/api', null],
    ['/../api/x', null],
    ['/apiary', '/apiary'],
    ['', null],
    [undefined, null],
  ])('%s leads to %s', (next, expected) => {
    expect(safeNext(next)).toBe(expected)
  })
})

describe('limits of sign-in', () => {
  const now = new Date('2026-05-12T10:00:00Z')
  const ago = (seconds: number) => new Date(now.getTime() - seconds * 1000)

  test('ask for no wait before the limit, then for the rest of the pause', () => {
    expect(secondsToWait(EMAIL_LIMIT, { wrong: 4, lastWrongAt: ago(1) }, now)).toBe(0)
    expect(secondsToWait(EMAIL_LIMIT, { wrong: 5, lastWrongAt: ago(1) }, now)).toBe(299)
    expect(secondsToWait(EMAIL_LIMIT, { wrong: 9, lastWrongAt: ago(300) }, now)).toBe(0)
    expect(secondsToWait(ADDRESS_LIMIT, { wrong: 29, lastWrongAt: ago(0) }, now)).toBe(0)
    expect(secondsToWait(ADDRESS_LIMIT, { wrong: 30, lastWrongAt: ago(0) }, now)).toBe(300)
    expect(secondsToWait(EMAIL_LIMIT, { wrong: 0, lastWrongAt: null }, now)).toBe(0)
  })

  test('are said in words', () => {
    expect([1, 45, 119, 120, 121, 300].map(waitWords)).toEqual([
      '1 second',
      '45 seconds',
      '119 seconds',
      '2 minutes',
      '3 minutes',
      '5 minutes',
    ])
    expect(wrongWords(4)).toBe('E-mail and password do not go together.')
    expect(wrongWords(2)).toMatch(/Two tries left before a pause of 5 minutes\.$/)
    expect(wrongWords(1)).toMatch(/One try left before a pause of 5 minutes\.$/)
    expect(wrongWords(0)).toMatch(/The next try is possible in 5 minutes\.$/)
  })
})

test('the caller’s address is what the nearest proxy wrote, not what the caller claims', () => {
  const from = (value?: string) =>
    addressIn(new Headers(value === undefined ? {} : { 'x-forwarded-for': value }))
  expect(from('203.0.113.9, 198.51.100.7')).toBe('198.51.100.7')
  expect(from('::ffff:127.0.0.1')).toBe('127.0.0.1')
  expect(from('2001:db8::1')).toBe('2001:db8::1')
  expect(from('not an address')).toBeNull()
  expect(from()).toBeNull()
})
