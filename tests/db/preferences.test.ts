import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { person } from '#app/db/schema/index.ts'
import { savePreferences } from '#app/services/preferences.server.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createUser } from '#tests/support/factories.ts'

const db = freshDatabase()

async function settingsOf(personId: number) {
  const [row] = await db
    .select({ pressureUnit: person.pressureUnit, theme: person.theme })
    .from(person)
    .where(eq(person.id, personId))
  return row
}

test('each setting is saved by itself, for the person who asks and nobody else', async () => {
  const [pim, bram] = [await createUser(db), await createUser(db)]
  await savePreferences(db, pim, { pressureUnit: 'mbar' })
  await savePreferences(db, pim, { theme: 'dark' })
  expect(await settingsOf(pim.personId)).toEqual({ pressureUnit: 'mbar', theme: 'dark' })
  expect(await settingsOf(bram.personId)).toEqual({ pressureUnit: 'Pa', theme: 'system' })
})

test('a form with neither setting is refused', async () => {
  const pim = await createUser(db)
  await expect(savePreferences(db, pim, {})).rejects.toMatchObject({ code: 'bad-input' })
})
