import { readFileSync } from 'node:fs'
import { expect, test } from 'vitest'
import { parseEnv } from '#app/env.server.ts'

const example = readFileSync('.env.example', 'utf8')
const listed = [...example.matchAll(/^([A-Z_]+)=/gm)].map(([, name]) => String(name))
const needed = {
  DATABASE_URL: 'mysql://a:b@127.0.0.1:3306/ebbline',
  SESSION_SECRET: 'x'.repeat(32),
}

test('.env.example lists every setting that the product reads, and no other', () => {
  expect([...listed].sort()).toEqual(Object.keys(parseEnv(needed)).sort())
})

test('each listed setting is explained above it', () => {
  const lines = example.split('\n')
  const bare = lines.filter(
    (line, index) => /^[A-Z_]+=/.test(line) && !/^(#|[A-Z_]+=)/.test(lines[index - 1] ?? ''),
  )
  expect(bare).toEqual([])
})

test('settings that cannot be used are named, all at once', () => {
  expect(() => parseEnv({ DATABASE_URL: 'postgres://x', SESSION_SECRET: 'short', PORT: '70000' })).toThrow(
    /DATABASE_URL[\s\S]*PORT[\s\S]*SESSION_SECRET[\s\S]*\.env\.example/,
  )
})
