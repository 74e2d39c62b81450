import { defineConfig } from 'drizzle-kit'

// Only `generate` and `check` are used. `push` and `pull` cannot read a MariaDB schema with CHECK constraints.
export default defineConfig({
  dialect: 'mysql',
  schema: './app/db/schema/index.ts',
  out: './drizzle',
})
