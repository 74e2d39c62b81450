import { describe, expect, test } from 'vitest'
import { demand, may } from '#app/domain/actor.ts'
import { type Grant, PERMISSIONS, ROLES, roleHas, rolesAt, rolesHave, whoMay } from '#app/domain/roles.ts'

const grant = (role: Grant['role'], startsAt: string, endsAt?: string, revokedAt?: string): Grant => ({
  role,
  startsAt: new Date(startsAt),
  endsAt: endsAt === undefined ? null : new Date(endsAt),
  revokedAt: revokedAt === undefined ? null : new Date(revokedAt),
})

describe('dated grants', () => {
  const grants = [
    grant('technician', '2026-01-01T00:00Z'),
    grant('engineer', '2026-05-01T00:00Z', '2026-06-01T00:00Z'),
    grant('manager', '2026-01-01T00:00Z', undefined, '2026-02-01T00:00Z'),
  ]

  test('hold from their first instant until just before their last', () => {
    expect(rolesAt(grants, new Date('2026-04-30T23:59:59Z'))).toEqual(['technician'])
    expect(rolesAt(grants, new Date('2026-05-01T00:00:00Z'))).toEqual(['technician', 'engineer'])
    expect(rolesAt(grants, new Date('2026-06-01T00:00:00Z'))).toEqual(['technician'])
  })

  test('no longer hold once revoked', () => {
    expect(rolesAt(grants, new Date('2026-01-31T00:00Z'))).toContain('manager')
    expect(rolesAt(grants, new Date('2026-02-01T00:00Z'))).not.toContain('manager')
  })

  test('before any of them there is no role', () => {
    expect(rolesAt(grants, new Date('2025-12-31T00:00Z'))).toEqual([])
  })
})

describe('permissions', () => {
  test('every permission is somebody’s', () => {
    for (const permission of PERMISSIONS) expect(whoMay(permission).length, permission).toBeGreaterThan(0)
  })

  test('a contributor sees and writes entries, may stop work, and nothing else', () => {
    const own = PERMISSIONS.filter((permission) => roleHas('contributor', permission))
    expect(own.sort()).toEqual(['entry:view', 'entry:write', 'permit:stop'])
  })

  test('being administrator gives no authority over data, limits or forecasts of record', () => {
    for (const permission of [
      'intake:take-in',
      'limit:edit',
      'forecast:record',
      'segment-state:set',
    ] as const) {
      expect(roleHas('administrator', permission), permission).toBe(false)
    }
  })

  test('several roles add up', () => {
    expect(rolesHave(['manager'], 'intake:take-in')).toBe(false)
    expect(rolesHave(['manager', 'technician'], 'intake:take-in')).toBe(true)
    expect(rolesHave([], 'facility:view')).toBe(false)
  })

  test('a refusal says who may and who asked', () => {
    const actor = { personId: 1, name: 'Magnus', roles: ['manager'] as const }
    expect(may(actor, 'limit:edit')).toBe(false)
    expect(() => demand(actor, 'limit:edit')).toThrow(/Vacuum engineer.*Magnus.*Facility manager/)
    expect(() => demand({ ...actor, roles: ROLES }, 'limit:edit')).not.toThrow()
  })
})
