import { describe, expect, it } from 'vitest'
import { concernsBuilding, liveNotice, parseLiveNotice } from '@/lib/wire/live'
import {
  deviceIdKey,
  gatewayUserName,
  isDeviceId,
  isSite,
  parseTopic,
  parseUserName,
  topicOf,
} from '@/lib/wire/topics'

describe('topics', () => {
  it('takes apart what it puts together', () => {
    for (const leaf of ['readings', 'status', 'supply'] as const) {
      expect(parseTopic(topicOf('mill', 'R01.co2', leaf))).toEqual({ site: 'mill', device: 'R01.co2', leaf })
    }
  })
  it.each([
    '',
    'ebbmark',
    'ebbmark/v1/mill/r01',
    'ebbmark/v1/mill/r01/readings/x',
    'ebbmark/v2/mill/r01/readings',
    'ebbmark/v1//r01/readings',
    'ebbmark/v1/mill//readings',
    'ebbmark/v1/mill/+/readings',
    'ebbmark/v1/#',
    'ebbmark/v1/mill/r 1/readings',
    'ebbmark/v1/Mill/r01/readings',
    '$SYS/broker/clients',
    'ebbmark/v1/mill/r01/toString',
    `ebbmark/v1/mill/${'r'.repeat(65)}/readings`,
  ])('refuses %j', (topic) => expect(parseTopic(topic)).toBeUndefined())
  it('knows device ids and sites', () => {
    expect(isDeviceId('A-z0.9_:')).toBe(true)
    expect(isDeviceId('r'.repeat(64))).toBe(true)
    expect([isDeviceId(''), isDeviceId('a/b'), isDeviceId('ä'), isDeviceId('r'.repeat(65))]).toEqual(
      Array(4).fill(false),
    )
    expect([isSite('old-mill-2'), isSite('-mill'), isSite('mill-'), isSite('m')]).toEqual([
      true,
      false,
      false,
      true,
    ])
    expect(deviceIdKey('R01.CO2')).toBe('r01.co2')
  })
  it('tells sensors and gateways apart by their user names', () => {
    expect(parseUserName('R01')).toEqual({ kind: 'sensor', key: 'r01' })
    expect(parseUserName(gatewayUserName('mill', 'AHU-1'))).toEqual({
      kind: 'gateway',
      site: 'mill',
      codeKey: 'ahu-1',
    })
    expect([
      parseUserName(''),
      parseUserName('a b'),
      parseUserName('mill/'),
      parseUserName('mill/a/b'),
    ]).toEqual(Array(4).fill(undefined))
  })
})

describe('live notices', () => {
  it('name up to 50 buildings, sorted and once each, then say many', () => {
    expect(liveNotice('readings', [3, 1, 3])).toEqual({ v: 1, kind: 'readings', buildings: [1, 3] })
    const ids = Array.from({ length: 50 }, (_, index) => index + 1)
    expect(liveNotice('readings', ids).buildings).toHaveLength(50)
    expect(liveNotice('readings', [...ids, 51]).buildings).toBe('many')
    const longest = liveNotice(
      'readings',
      ids.map((id) => 2_147_483_600 - id),
    )
    expect(JSON.stringify(longest).length).toBeLessThan(8000)
  })
  it('come back from their payload, and anything else is passed by', () => {
    const notice = liveNotice('night', [7])
    expect(parseLiveNotice(JSON.stringify(notice))).toEqual(notice)
    expect([concernsBuilding(notice, 7), concernsBuilding(notice, 8)]).toEqual([true, false])
    expect(concernsBuilding({ v: 1, kind: 'night', buildings: 'many' }, 8)).toBe(true)
    for (const payload of [
      undefined,
      '',
      '{',
      '{"v":2,"kind":"night","buildings":[]}',
      '{"v":1,"kind":"night"}',
    ])
      expect(parseLiveNotice(payload)).toBeUndefined()
  })
})
