/** One definition each of an id, an instant and a JSON value, so that no table invents its own. */
import { bigint, customType, datetime } from 'drizzle-orm/mysql-core'
import type { z } from 'zod'

/** Auto-numbered primary key. */
export function id() {
  return bigint('id', { mode: 'number', unsigned: true }).autoincrement().primaryKey()
}

/** Reference to another table's id. */
export function ref(name: string) {
  return bigint(name, { mode: 'number', unsigned: true })
}

/** An instant: UTC, to the millisecond, DATETIME and never TIMESTAMP (which shifts with the session's zone). */
export function utc(name: string) {
  return datetime(name, { mode: 'date', fsp: 3 })
}

/**
 * A JSON value checked by a zod schema when it is read as well as when it is written. MariaDB's JSON is text with a
 * check; the driver hands it over parsed or as a string depending on the expression, so both are taken.
 */
export function json<Schema extends z.ZodType>(name: string, schema: Schema) {
  return customType<{ data: z.infer<Schema>; driverData: string }>({
    dataType: () => 'json',
    toDriver: (value) => JSON.stringify(schema.parse(value)),
    fromDriver: (value) => schema.parse(typeof value === 'string' ? JSON.parse(value) : value),
  })(name)
}

/** Bytes. Rows of at most 1 MiB, see attachments. */
export const bytes = customType<{ data: Uint8Array; driverData: Buffer }>({
  dataType: () => 'mediumblob',
  toDriver: (value) => Buffer.from(value.buffer, value.byteOffset, value.byteLength),
  fromDriver: (value) => new Uint8Array(value.buffer, value.byteOffset, value.byteLength),
})
