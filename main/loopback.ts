import { randomBytes, timingSafeEqual } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { Answer, Notice } from './bridge';
import { decode, encode } from './page/codec';
import { filesUnder, PAGE_HEADERS, typeOf } from './page/page-files';

/** What carries calls to the session and notices back; `Session` is one. */
export interface Listener {
  call(name: string, argument: unknown): Promise<Answer<unknown>>;
  listen(hear: (notice: Notice) => void): () => void;
}

export interface Loopback {
  port: number;
  /** Opens the window once: its key is changed into a session by the first request that brings it. */
  url: string;
  close(): Promise<void>;
}

const LOOPBACK = '127.0.0.1';
/** Names a browser may have used to get here. The port may be another one: that of a tunnel's near end. */
const HOST = /^(127\.0\.0\.1|localhost|\[::1\])(:\d{1,5})?$/;
const KEY_BYTES = 32;
/** A figure that is saved is the largest thing a page sends (see `saveFile` in `bridge.ts`). */
const MOST_BODY = 272 * 2 ** 20;
/** A call that takes longer answers by a ticket and leaves its connection. */
const PATIENCE_MS = 250;
/** Keeps a tunnel from closing a silent stream. */
const HEARTBEAT_MS = 20_000;

/**
 * Serves the built renderer in `folder` and the bridge to `listener`, on 127.0.0.1 alone. Port 0 takes a free one.
 * Rejects with the system's error where the port is taken.
 */
export async function startLoopback(listener: Listener, folder: string, port = 0): Promise<Loopback> {
  const desk = new Reception(listener, await filesUnder(folder));
  const server = createServer((request, response) => void desk.receive(request, response));
  await listening(server, port);
  const { port: bound } = server.address() as AddressInfo;
  return {
    port: bound,
    url: `http://${LOOPBACK}:${bound}/?key=${desk.key}`,
    close: () => closed(server, desk),
  };
}

/** Every request passes here. What does not hold the session is refused before anything else is looked at. */
class Reception {
  readonly key = secret();
  private readonly session = secret();
  private readonly cookie = `entasis-${randomBytes(6).toString('hex')}`;
  private keyUsed = false;
  private readonly answers = new Map<string, Answer<unknown>>();
  private readonly streams = new Set<ServerResponse>();
  private readonly unlisten: () => void;
  private readonly heartbeat: NodeJS.Timeout;

  constructor(
    private readonly listener: Listener,
    private readonly files: ReadonlyMap<string, string>,
  ) {
    this.unlisten = listener.listen((notice) => this.tell(notice));
    this.heartbeat = setInterval(() => this.tell({ kind: 'alive' }), HEARTBEAT_MS).unref();
  }

  async receive(request: IncomingMessage, response: ServerResponse): Promise<void> {
    for (const [name, value] of Object.entries(PAGE_HEADERS)) response.setHeader(name, value);
    try {
      await this.route(request, response);
    } catch (error) {
      const status = error instanceof Refused ? error.status : 500;
      if (!response.headersSent) response.writeHead(status, { 'content-type': 'text/plain; charset=utf-8' });
      // The rest of a body that nobody will read must not keep the connection.
      response.end(error instanceof Refused ? error.message : 'fault', () => request.destroy());
    }
  }

  end(): void {
    clearInterval(this.heartbeat);
    this.unlisten();
    this.streams.forEach((stream) => stream.end());
  }

  private async route(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const host = request.headers.host ?? '';
    if (!HOST.test(host)) throw new Refused(403, 'wrong host');
    const url = parsedUrl(request.url ?? '');
    if (!this.holdsSession(request)) {
      const key = request.method === 'GET' && url.pathname === '/' ? url.searchParams.get('key') : null;
      if (key !== null) return this.admit(key, response);
      throw new Refused(403, 'This window has no session: start Entasis again and use the address it prints.');
    }
    if (request.method === 'GET' || request.method === 'HEAD') return this.sendFile(request, url.pathname, response);
    if (request.method !== 'POST') throw new Refused(405, 'wrong method');
    if (request.headers.origin !== `http://${host}`) throw new Refused(403, 'wrong origin');
    return this.post(request, url.pathname, response);
  }

  private admit(key: string, response: ServerResponse): void {
    if (this.keyUsed || !same(key, this.key)) {
      throw new Refused(403, 'This address was used before: start Entasis again and use the address it prints.');
    }
    this.keyUsed = true;
    // No redirect: a browser that was sent here from elsewhere would not bring a strict cookie along. The page takes
    // the key out of its address itself.
    response.setHeader('set-cookie', `${this.cookie}=${this.session}; Path=/; HttpOnly; SameSite=Strict`);
    this.send('/index.html', response);
  }

  private holdsSession(request: IncomingMessage): boolean {
    const cookies = (request.headers.cookie ?? '').split(';').map((cookie) => cookie.trim());
    const own = cookies.find((cookie) => cookie.startsWith(`${this.cookie}=`));
    return own !== undefined && same(own.slice(this.cookie.length + 1), this.session);
  }

  private sendFile(request: IncomingMessage, pathname: string, response: ServerResponse): void {
    if (crossSite(request)) throw new Refused(403, 'wrong origin');
    this.send(pathname === '/' ? '/index.html' : pathname, response, request.method === 'HEAD');
  }

  private send(pathname: string, response: ServerResponse, headOnly = false): void {
    const file = this.files.get(pathname);
    if (file === undefined) throw new Refused(404, 'not found');
    response.writeHead(200, { 'content-type': typeOf(file) });
    if (headOnly) return void response.end();
    createReadStream(file)
      .on('error', () => response.destroy())
      .pipe(response);
  }

  private async post(request: IncomingMessage, pathname: string, response: ServerResponse): Promise<void> {
    if (pathname === '/notices') return this.openStream(response);
    const ticket = /^\/answer\/([\w-]{1,64})$/.exec(pathname)?.[1];
    if (ticket !== undefined) return reply(response, this.collect(ticket));
    const name = /^\/call\/([A-Za-z]{1,64})$/.exec(pathname)?.[1];
    if (name === undefined) throw new Refused(404, 'not found');
    return this.answerCall(name, request, response);
  }

  private async answerCall(name: string, request: IncomingMessage, response: ServerResponse): Promise<void> {
    const answer = this.listener.call(name, decoded(await bodyOf(request)));
    const first = await Promise.race([answer, later(PATIENCE_MS)]);
    if (first !== LATE) return reply(response, first);
    const ticket = secret();
    void answer.then((late) => {
      this.answers.set(ticket, late);
      this.tell({ kind: 'answered', ticket });
    });
    reply(response, { ticket });
  }

  private collect(ticket: string): Answer<unknown> {
    const answer = this.answers.get(ticket);
    if (!answer) throw new Refused(404, 'no such answer');
    this.answers.delete(ticket);
    return answer;
  }

  private openStream(response: ServerResponse): void {
    response.writeHead(200, { 'content-type': 'application/x-ndjson' });
    response.write('\n');
    this.streams.add(response);
    response.on('close', () => {
      this.streams.delete(response);
      // Nobody is left who holds a ticket.
      if (this.streams.size === 0) this.answers.clear();
    });
  }

  private tell(notice: Notice | { kind: 'answered'; ticket: string } | { kind: 'alive' }): void {
    const line = `${JSON.stringify(notice)}\n`;
    this.streams.forEach((stream) => stream.write(line));
  }
}

class Refused extends Error {
  constructor(
    readonly status: number,
    message: string,
  ) {
    super(message);
  }
}

const LATE = Symbol('late');
function later(ms: number): Promise<typeof LATE> {
  return new Promise((resolve) => setTimeout(resolve, ms, LATE).unref());
}

function reply(response: ServerResponse, answer: unknown): void {
  response.writeHead(200, { 'content-type': 'application/octet-stream' }).end(encode(answer));
}

async function bodyOf(request: IncomingMessage): Promise<Buffer> {
  if (request.headers['content-type'] !== 'application/octet-stream') throw new Refused(415, 'wrong content type');
  const parts: Buffer[] = [];
  let bytes = 0;
  for await (const part of request as AsyncIterable<Buffer>) {
    bytes += part.length;
    if (bytes > MOST_BODY) throw new Refused(413, 'too large');
    parts.push(part);
  }
  return Buffer.concat(parts);
}

function decoded(body: Buffer): unknown {
  try {
    return decode(body);
  } catch {
    throw new Refused(400, 'not a message of the bridge');
  }
}

function parsedUrl(url: string): URL {
  if (!url.startsWith('/') || !URL.canParse(url, 'http://page')) throw new Refused(400, 'wrong address');
  return new URL(url, 'http://page');
}

/** Browsers say so themselves where another site asks for a file of ours. */
function crossSite(request: IncomingMessage): boolean {
  const site = request.headers['sec-fetch-site'];
  return site !== undefined && site !== 'same-origin' && site !== 'none';
}

function secret(): string {
  return randomBytes(KEY_BYTES).toString('base64url');
}

function same(given: string, expected: string): boolean {
  const a = Buffer.from(given);
  const b = Buffer.from(expected);
  return a.length === b.length && timingSafeEqual(a, b);
}

function listening(server: Server, port: number): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, LOOPBACK, () => resolve());
  });
}

function closed(server: Server, desk: Reception): Promise<void> {
  desk.end();
  return new Promise((resolve) => {
    server.close(() => resolve());
    server.closeAllConnections();
  });
}
