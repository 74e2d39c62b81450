/** The description of the API as an OpenAPI 3.1 document, made from the schemas that the routes go by. */
import { z } from 'zod'
import { ERROR_STATUS } from './errors.ts'
import {
  FileAnswerSchema,
  FileProblemSchema,
  PostAnswerSchema,
  PostProblemSchema,
  ProblemSchema,
  RequestKeySchema,
} from './schemas/api-answers.ts'
import { POST_LIMITS, PostSchema } from './schemas/live-readings.ts'

interface ApiLimits {
  fileMib: number
  postsPerMinute: number
}

/** JSON Schema 2020-12, the dialect of OpenAPI 3.1, without the line that names it. */
function schemaOf(schema: z.ZodType, io: 'input' | 'output'): object {
  const { $schema: _dialect, ...rest } = z.toJSONSchema(schema, { io })
  return rest
}

const ref = (name: string) => ({ $ref: `#/components/schemas/${name}` })
const json = (name: string) => ({ 'application/json': { schema: ref(name) } })
const problemOf = (name: string) => ({ 'application/problem+json': { schema: ref(name) } })

const SOURCE = {
  name: 'code',
  in: 'path',
  required: true,
  description: 'Code of the source in the register, such as NL-W.',
  schema: { type: 'string' },
}

const NAME = {
  name: 'name',
  in: 'path',
  required: true,
  description: 'Name of the file. It is shown to people and decides nothing.',
  schema: { type: 'string' },
}

const REQUEST_KEY = {
  name: 'Idempotency-Key',
  in: 'header',
  required: true,
  schema: schemaOf(RequestKeySchema, 'input'),
}

/** What any request may meet. */
const COMMON = {
  [ERROR_STATUS['bad-input']]: { description: 'The request cannot be read.', content: problemOf('Problem') },
  [ERROR_STATUS['not-signed-in']]: {
    description: 'No token, or one that is not in force.',
    headers: { 'WWW-Authenticate': { schema: { type: 'string' } } },
    content: problemOf('Problem'),
  },
  [ERROR_STATUS.forbidden]: { description: 'The token is for other sources.', content: problemOf('Problem') },
  [ERROR_STATUS['not-found']]: { description: 'No such source.', content: problemOf('Problem') },
  405: {
    description: 'Another method than the one described.',
    headers: { Allow: { schema: { type: 'string' } } },
    content: problemOf('Problem'),
  },
  [ERROR_STATUS['rate-limited']]: {
    description: 'More requests within a minute than a token may make.',
    headers: {
      'Retry-After': { description: 'Seconds to wait.', schema: { type: 'integer', minimum: 1 } },
    },
    content: problemOf('Problem'),
  },
}

/** @returns the document, ready to be written as JSON */
export function apiDocument({ fileMib, postsPerMinute }: ApiLimits) {
  const rate = `At most ${postsPerMinute} requests a minute with one token.`
  return {
    openapi: '3.1.0',
    info: {
      title: 'Ebbline',
      version: '1',
      description: `Night files and live readings from loggers. An administrator makes a token for the sources of a machine. ${rate}`,
    },
    servers: [{ url: '/' }],
    security: [{ token: [] }],
    paths: {
      '/api/v1/openapi.json': {
        get: {
          operationId: 'readDescription',
          summary: 'This description',
          security: [],
          responses: { 200: { description: 'The description.', content: { 'application/json': {} } } },
        },
      },
      '/api/v1/sources/{code}/files/{name}': {
        put: {
          operationId: 'sendFile',
          summary: 'Send a night file as it is',
          description: `The body is the bytes of the file, up to ${fileMib} MiB. It is read and waits in the log intake until a person takes it in. The same bytes again change nothing.`,
          parameters: [SOURCE, NAME],
          requestBody: {
            required: true,
            content: { 'application/octet-stream': {}, 'text/csv': {} },
          },
          responses: {
            200: { description: 'These bytes had come before.', content: json('FileAnswer') },
            201: {
              description: 'Kept.',
              headers: { Location: { schema: { type: 'string' } } },
              content: json('FileAnswer'),
            },
            ...COMMON,
            [ERROR_STATUS['too-large']]: {
              description: 'Larger than what is taken.',
              content: problemOf('Problem'),
            },
            [ERROR_STATUS['wrong-type']]: {
              description: 'Kept, but no log: an archive, a spreadsheet, a saved web page.',
              content: problemOf('FileProblem'),
            },
            [ERROR_STATUS['not-acceptable-now']]: {
              description: 'Kept, but nothing can be taken from it.',
              content: problemOf('FileProblem'),
            },
          },
        },
      },
      '/api/v1/bounces': {
        post: {
          operationId: 'sendBounce',
          summary: 'Hand in a mail that came back',
          description:
            'For the mail server: the body is a delivery-status notification (RFC 3464) as it came to a bounce address. The token is that of the setting BOUNCE_TOKEN. The same notice again changes nothing.',
          requestBody: { required: true, content: { 'message/rfc822': {} } },
          responses: {
            200: { description: 'Written down.', content: { 'application/json': {} } },
            ...COMMON,
            [ERROR_STATUS['not-found']]: {
              description: 'About no mail of ours.',
              content: problemOf('Problem'),
            },
            [ERROR_STATUS['too-large']]: {
              description: 'Larger than what is taken, or without its length.',
              content: problemOf('Problem'),
            },
          },
        },
      },
      '/api/v1/sources/{code}/readings': {
        post: {
          operationId: 'postReadings',
          summary: 'Post live readings',
          description: `All readings of a post are stored, or none. At most ${POST_LIMITS.readings} readings and ${POST_LIMITS.bodyBytes / 2 ** 20} MiB in one post.`,
          parameters: [SOURCE, REQUEST_KEY],
          requestBody: { required: true, content: json('Post') },
          responses: {
            200: {
              description: 'Stored, or stored before under the same key.',
              content: json('PostAnswer'),
            },
            ...COMMON,
            [ERROR_STATUS['too-large']]: {
              description: 'A larger body than one post may have.',
              content: problemOf('Problem'),
            },
            [ERROR_STATUS['wrong-type']]: {
              description: 'No JSON, or compressed.',
              content: problemOf('Problem'),
            },
            [ERROR_STATUS['not-acceptable-now']]: {
              description: 'Something is wrong with a reading, or the key belongs to another post.',
              content: problemOf('PostProblem'),
            },
          },
        },
      },
    },
    components: {
      securitySchemes: { token: { type: 'http', scheme: 'bearer' } },
      schemas: {
        Post: schemaOf(PostSchema, 'input'),
        PostAnswer: schemaOf(PostAnswerSchema, 'output'),
        FileAnswer: schemaOf(FileAnswerSchema, 'output'),
        Problem: schemaOf(ProblemSchema, 'output'),
        PostProblem: schemaOf(PostProblemSchema, 'output'),
        FileProblem: schemaOf(FileProblemSchema, 'output'),
      },
    },
  }
}
