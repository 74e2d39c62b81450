/**
 * A mail server for demo and tests: takes every message on loopback, delivers none, and shows what it holds over HTTP.
 * GET /messages lists them, newest first; GET /messages/<id>.eml gives the bytes; DELETE /messages forgets them.
 */
import { mkdir, readdir, readFile, rm, writeFile } from 'node:fs/promises'
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import type { AddressInfo } from 'node:net'
import { join } from 'node:path'
import { buffer } from 'node:stream/consumers'
import { type AddressObject, simpleParser } from 'mailparser'
import { SMTPServer } from 'smtp-server'

const LARGEST_BYTES = 40 * 1024 * 1024

export interface KeptMessage {
  id: number
  /** When the sender wrote it, as the message says; null when it says nothing. */
  date: string | null
  from: string
  to: string[]
  subject: string
  text: string
  html: string
  attachments: { filename: string; contentType: string; size: number }[]
}

export interface MailFakeOptions {
  smtpPort?: number
  httpPort?: number
  /** Where the messages are kept as files; without it they are gone with the process. */
  folder?: string
  /** Older ones are forgotten. */
  keep?: number
}

export interface MailFake {
  smtpUrl: string
  httpUrl: string
  stop(): Promise<void>
}

interface Box {
  messages: { message: KeptMessage; bytes: Buffer }[]
  nextId: number
  folder: string | undefined
  keep: number
}

/** Starts the mail fake on free ports of 127.0.0.1 (or those given); rejects when a port cannot be had. */
export async function startMailFake(options: MailFakeOptions = {}): Promise<MailFake> {
  const box: Box = { messages: [], nextId: 1, folder: options.folder, keep: options.keep ?? 500 }
  await load(box)
  const smtp = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS'],
    size: LARGEST_BYTES,
    logger: false,
    onData(stream, _session, done) {
      buffer(stream)
        .then((bytes) => {
          if (stream.sizeExceeded) throw new Error(`Message over ${LARGEST_BYTES} bytes`)
          return take(box, bytes)
        })
        .then(
          () => done(),
          (error: Error) => done(error),
        )
    },
  })
  // A client that hangs up in the middle of a message is that client's trouble.
  smtp.on('error', () => {})
  const web = createServer((request, response) => {
    answer(box, request, response).catch((error: unknown) => send(response, 500, { error: String(error) }))
  })
  await new Promise<void>((resolve, reject) => {
    smtp.server.once('error', reject)
    smtp.listen(options.smtpPort ?? 0, '127.0.0.1', resolve)
  })
  await new Promise<void>((resolve, reject) => {
    web.once('error', reject)
    web.listen(options.httpPort ?? 0, '127.0.0.1', resolve)
  })
  return {
    smtpUrl: `smtp://127.0.0.1:${(smtp.server.address() as AddressInfo).port}`,
    httpUrl: `http://127.0.0.1:${(web.address() as AddressInfo).port}`,
    async stop() {
      await new Promise<void>((resolve) => smtp.close(resolve))
      web.closeAllConnections()
      await new Promise<void>((resolve) => web.close(() => resolve()))
    },
  }
}

/** Reads the messages of an earlier run. */
async function load(box: Box): Promise<void> {
  if (box.folder === undefined) return
  await mkdir(box.folder, { recursive: true, mode: 0o700 })
  const ids = (await readdir(box.folder))
    .map((name) => Number(/^(\d+)\.eml$/.exec(name)?.[1]))
    .filter((id) => Number.isSafeInteger(id))
    .sort((a, b) => a - b)
  for (const id of ids) {
    const bytes = await readFile(join(box.folder, `${id}.eml`))
    box.messages.push({ message: await read(id, bytes), bytes })
    box.nextId = id + 1
  }
}

async function take(box: Box, bytes: Buffer): Promise<void> {
  const id = box.nextId++
  const message = await read(id, bytes)
  if (box.folder !== undefined) await writeFile(join(box.folder, `${id}.eml`), bytes)
  box.messages.push({ message, bytes })
  await forget(box, box.messages.splice(0, Math.max(0, box.messages.length - box.keep)))
}

async function forget(box: Box, messages: Box['messages']): Promise<void> {
  if (box.folder === undefined) return
  for (const { message } of messages) await rm(join(box.folder, `${message.id}.eml`), { force: true })
}

async function read(id: number, bytes: Buffer): Promise<KeptMessage> {
  const mail = await simpleParser(bytes)
  return {
    id,
    date: mail.date?.toISOString() ?? null,
    from: mail.from?.text ?? '',
    to: addresses(mail.to),
    subject: mail.subject ?? '',
    text: mail.text ?? '',
    html: mail.html || '',
    attachments: mail.attachments.map(({ filename, contentType, size }) => ({
      filename: filename ?? '',
      contentType,
      size,
    })),
  }
}

function addresses(field: AddressObject | AddressObject[] | undefined): string[] {
  return [field ?? []]
    .flat()
    .flatMap(({ value }) => value.map(({ address }) => address ?? ''))
    .filter((address) => address !== '')
}

async function answer(box: Box, request: IncomingMessage, response: ServerResponse): Promise<void> {
  const path = request.url ?? ''
  if (path === '/messages' && request.method === 'GET') {
    return send(response, 200, box.messages.map(({ message }) => message).reverse())
  }
  if (path === '/messages' && request.method === 'DELETE') {
    await forget(box, box.messages.splice(0))
    return send(response, 200, [])
  }
  const id = Number(/^\/messages\/(\d+)\.eml$/.exec(path)?.[1])
  const found = box.messages.find(({ message }) => message.id === id)
  if (found !== undefined && request.method === 'GET') {
    response.writeHead(200, { 'Content-Type': 'message/rfc822' }).end(found.bytes)
    return
  }
  send(response, 404, { error: 'There is nothing here: ask for /messages or /messages/<id>.eml.' })
}

function send(response: ServerResponse, status: number, body: unknown): void {
  response.writeHead(status, { 'Content-Type': 'application/json; charset=utf-8' }).end(JSON.stringify(body))
}
