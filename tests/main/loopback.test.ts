import { mkdtempSync, mkdirSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { request as httpRequest, type IncomingHttpHeaders } from 'node:http';
import { connect as connectSocket } from 'node:net';
import { networkInterfaces, tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, beforeEach, afterEach, describe, expect, it } from 'vitest';
import type { Answer, Notice } from '../../main/bridge';
import { decode, encode } from '../../main/page/codec';
import { startLoopback, type Loopback } from '../../main/loopback';

interface Reply {
  status: number;
  headers: IncomingHttpHeaders;
  body: Buffer;
}
interface Ask {
  method?: string;
  path?: string;
  headers?: Record<string, string>;
  body?: Uint8Array;
}

let folder: string;
let renderer: string;
let loopback: Loopback;
let calls: { name: string; argument: unknown }[];
let hear: ((notice: Notice) => void) | undefined;
let answerOf: (name: string) => Promise<Answer<unknown>>;

const listener = {
  call(name: string, argument: unknown) {
    calls.push({ name, argument });
    return answerOf(name);
  },
  listen(listen: (notice: Notice) => void) {
    hear = listen;
    return () => (hear = undefined);
  },
};

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-loopback-'));
  renderer = join(folder, 'renderer');
  mkdirSync(join(renderer, 'assets'), { recursive: true });
  writeFileSync(join(folder, 'secret.txt'), 'not for the page');
  writeFileSync(join(renderer, 'index.html'), '<!doctype html><title>Entasis</title>');
  writeFileSync(join(renderer, 'assets', 'page.js'), 'export {};');
  symlinkSync(join(folder, 'secret.txt'), join(renderer, 'link.txt'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

beforeEach(async () => {
  calls = [];
  answerOf = () => Promise.resolve({ ok: true, value: { values: Float64Array.of(1, 2) } });
  loopback = await startLoopback(listener, renderer);
});
afterEach(() => loopback.close());

function ask({ method = 'GET', path = '/', headers = {}, body }: Ask): Promise<Reply> {
  return new Promise((resolve, reject) => {
    const request = httpRequest(
      { host: '127.0.0.1', port: loopback.port, method, path, headers, agent: false },
      (response) => {
        const parts: Buffer[] = [];
        response.on('data', (part: Buffer) => parts.push(part));
        response.on('error', reject);
        response.on('end', () =>
          resolve({ status: response.statusCode!, headers: response.headers, body: Buffer.concat(parts) }),
        );
      },
    );
    request.on('error', reject);
    request.end(body);
  });
}

const keyPath = () => loopback.url.slice(loopback.url.indexOf('/?'));
const ownHost = () => `127.0.0.1:${loopback.port}`;

async function admitted(): Promise<string> {
  const reply = await ask({ path: keyPath() });
  expect(reply.status).toBe(200);
  return reply.headers['set-cookie']![0]!.split(';')[0]!;
}

function callWith(cookie: string, headers: Record<string, string> = {}, path = '/call/start', body = encode({})) {
  const own = { cookie, origin: `http://${ownHost()}`, 'content-type': 'application/octet-stream', ...headers };
  const kept = Object.fromEntries(Object.entries(own).filter(([, value]) => value !== ''));
  return ask({ method: 'POST', path, headers: kept, body });
}

describe('the one-time key', () => {
  it('is changed into a session cookie that scripts cannot read and other sites do not send', async () => {
    const { headers, body } = await ask({ path: keyPath() });
    expect(body.toString()).toContain('Entasis');
    expect(headers['set-cookie']![0]).toMatch(/^entasis-[0-9a-f]+=[\w-]{43}; Path=\/; HttpOnly; SameSite=Strict$/);
  });

  it('opens one session only', async () => {
    await admitted();
    expect((await ask({ path: keyPath() })).status).toBe(403);
  });

  it('does no harm in the address of a window that has its session, so that it can be loaded again', async () => {
    const cookie = await admitted();
    expect((await ask({ path: keyPath(), headers: { cookie } })).status).toBe(200);
  });

  it('is refused when it is wrong, empty or shortened, and stays good for the right one', async () => {
    const key = keyPath();
    for (const path of ['/?key=', '/?key=x', key.slice(0, -1), `${key}A`, key.toLowerCase(), '/?KEY=1']) {
      expect((await ask({ path })).status, path).toBe(403);
    }
    expect((await ask({ path: key })).status).toBe(200);
  });
});

describe('the session', () => {
  it('serves the page, its files and the bridge', async () => {
    const cookie = await admitted();
    const page = await ask({ headers: { cookie } });
    expect(page.status).toBe(200);
    expect(page.body.toString()).toContain('Entasis');
    const script = await ask({ path: '/assets/page.js', headers: { cookie } });
    expect(script.headers['content-type']).toContain('text/javascript');
    const answer = await callWith(cookie);
    expect(decode(answer.body)).toStrictEqual({ ok: true, value: { values: Float64Array.of(1, 2) } });
    expect(calls).toStrictEqual([{ name: 'start', argument: {} }]);
  });

  it('is asked for before anything: no file and no call without its cookie, or with a wrong one', async () => {
    const [name, value] = (await admitted()).split('=') as [string, string];
    const wrong = [
      '',
      `${name}=`,
      `${name}=${value.slice(1)}`,
      `${name}=${value}x`,
      `entasis=${value}`,
      `x${name}=${value}`,
    ];
    for (const cookie of wrong) {
      for (const path of ['/', '/index.html', '/assets/page.js', '/none', '/secret.txt']) {
        expect((await ask({ path, headers: cookie === '' ? {} : { cookie } })).status, `${cookie} ${path}`).toBe(403);
      }
      expect((await callWith(cookie)).status, cookie).toBe(403);
      expect((await callWith(cookie, {}, '/notices')).status, cookie).toBe(403);
    }
    expect(calls).toStrictEqual([]);
  });

  it('stands among cookies of other servers of this host', async () => {
    const cookie = await admitted();
    expect((await ask({ headers: { cookie: `a=b; ${cookie}; c=d` } })).status).toBe(200);
  });
});

describe('Host and Origin', () => {
  it('are taken from this machine under its loopback names, at any port, as through a tunnel', async () => {
    const cookie = await admitted();
    for (const host of [ownHost(), 'localhost:8888', '127.0.0.1', '[::1]:9000']) {
      expect((await ask({ headers: { cookie, host } })).status, host).toBe(200);
      expect((await callWith(cookie, { host, origin: `http://${host}` })).status, host).toBe(200);
    }
  });

  it('refuse every other host, whoever holds the session or the key (DNS rebinding)', async () => {
    const cookie = await admitted();
    const hosts = [
      'evil.example',
      `evil.example:${loopback.port}`,
      '127.0.0.1.evil.example',
      'localhost.evil.example',
      '0.0.0.0',
      '127.0.0.2',
      '[::]',
      'localhost:1:2',
      '127.0.0.1:',
      'localhost.',
      ' ',
    ];
    for (const host of hosts) {
      expect((await ask({ headers: { cookie, host } })).status, host).toBeGreaterThanOrEqual(400);
      expect((await callWith(cookie, { host, origin: `http://${host}` })).status, host).toBeGreaterThanOrEqual(400);
      expect((await ask({ path: keyPath(), headers: { host } })).status, host).toBeGreaterThanOrEqual(400);
    }
    expect(calls).toStrictEqual([]);
  });

  it('refuse a call from every other origin, or from none', async () => {
    const cookie = await admitted();
    const origins = [
      '',
      'null',
      'http://evil.example',
      `https://${ownHost()}`,
      'http://127.0.0.1',
      'http://localhost:1',
      `http://${ownHost()}.evil.example`,
      `http://${ownHost()}/`,
    ];
    for (const origin of origins) {
      expect((await callWith(cookie, { origin })).status, origin).toBe(403);
      expect((await callWith(cookie, { origin }, '/notices')).status, origin).toBe(403);
    }
    expect(calls).toStrictEqual([]);
  });

  it('refuse a file to another site that asks for it as a script or a picture', async () => {
    const cookie = await admitted();
    for (const site of ['cross-site', 'same-site']) {
      expect((await ask({ path: '/assets/page.js', headers: { cookie, 'sec-fetch-site': site } })).status).toBe(403);
    }
    for (const site of ['same-origin', 'none']) {
      expect((await ask({ path: '/assets/page.js', headers: { cookie, 'sec-fetch-site': site } })).status).toBe(200);
    }
  });
});

describe('addresses', () => {
  it('name the built page alone: nothing beside it, above it, or linked from it', async () => {
    const cookie = await admitted();
    const paths = [
      '/secret.txt',
      '/../secret.txt',
      '/%2e%2e/secret.txt',
      '/..%2fsecret.txt',
      '/assets/../../secret.txt',
      '/assets',
      '/assets/',
      '/link.txt',
      '/etc/passwd',
      '//etc/passwd',
      '/index.html/',
      '/index.html%00',
      '/%69ndex.html',
      '/\\..\\secret.txt',
    ];
    for (const path of paths) {
      const reply = await ask({ path, headers: { cookie } });
      expect([400, 404], path).toContain(reply.status);
      expect(reply.body.toString(), path).not.toContain('not for the page');
    }
  });

  it('that are no path are refused', async () => {
    const cookie = await admitted();
    for (const path of ['http://evil.example/', '*']) {
      expect((await ask({ path, headers: { cookie } })).status, path).toBe(400);
    }
  });

  it('refuse methods other than GET, HEAD and POST', async () => {
    const cookie = await admitted();
    for (const method of ['PUT', 'DELETE', 'OPTIONS', 'PATCH']) {
      expect((await ask({ method, headers: { cookie } })).status, method).toBe(405);
    }
    expect((await ask({ method: 'HEAD', headers: { cookie } })).status).toBe(200);
  });
});

describe('messages', () => {
  it('are refused with another content type, as a form would send', async () => {
    const cookie = await admitted();
    for (const type of ['', 'text/plain', 'application/x-www-form-urlencoded', 'application/json']) {
      expect((await callWith(cookie, { 'content-type': type })).status, type).toBe(415);
    }
    expect(calls).toStrictEqual([]);
  });

  it('are refused when they are damaged, and the server goes on', async () => {
    const cookie = await admitted();
    for (const body of [new Uint8Array(0), new Uint8Array([9, 9, 9, 9, 9])]) {
      expect((await callWith(cookie, {}, '/call/start', body as Uint8Array<ArrayBuffer>)).status).toBe(400);
    }
    expect((await callWith(cookie)).status).toBe(200);
  });

  it('to no call or answer are refused', async () => {
    const cookie = await admitted();
    for (const path of ['/call/', '/call/a/b', '/call/__proto__', '/answer/none', '/other', '/']) {
      expect((await callWith(cookie, {}, path)).status, path).toBe(404);
    }
  });

  it('survive a client that breaks off', async () => {
    const cookie = await admitted();
    await new Promise<void>((resolve) => {
      const socket = connectSocket(loopback.port, '127.0.0.1', () => {
        socket.write(
          `POST /call/start HTTP/1.1\r\nHost: ${ownHost()}\r\nOrigin: http://${ownHost()}\r\nCookie: ${cookie}\r\nContent-Type: application/octet-stream\r\nContent-Length: 1000\r\n\r\nabc`,
          () => (socket.destroy(), resolve()),
        );
      });
    });
    expect((await callWith(cookie)).status).toBe(200);
  });
});

describe('every reply', () => {
  it('carries a strict content security policy and forbids framing, sniffing and caching', async () => {
    const cookie = await admitted();
    for (const reply of [await ask({}), await ask({ headers: { cookie } }), await callWith(cookie)]) {
      const policy = reply.headers['content-security-policy'] as string;
      expect(policy).toContain("default-src 'none'");
      expect(policy).toContain("script-src 'self';");
      expect(policy).toContain("frame-ancestors 'none'");
      expect(policy).not.toMatch(/unsafe-eval|script-src[^;]*unsafe/);
      expect(reply.headers['x-content-type-options']).toBe('nosniff');
      expect(reply.headers['cache-control']).toBe('no-store');
      expect(reply.headers['cross-origin-opener-policy']).toBe('same-origin');
    }
  });
});

describe('long calls and notices', () => {
  it('answer by a ticket that is good once, told by the stream of notices', async () => {
    const cookie = await admitted();
    let finish!: (answer: Answer<unknown>) => void;
    answerOf = () => new Promise((resolve) => (finish = resolve));
    const stream = await openStream(cookie);
    const { ticket } = decode((await callWith(cookie)).body) as { ticket: string };
    hear!({ kind: 'open', path: 'a.study.json' });
    finish({ ok: true, value: 7 });
    expect(await stream.next()).toStrictEqual({ kind: 'open', path: 'a.study.json' });
    expect(await stream.next()).toStrictEqual({ kind: 'answered', ticket });
    expect(decode((await callWith(cookie, {}, `/answer/${ticket}`)).body)).toStrictEqual({ ok: true, value: 7 });
    expect((await callWith(cookie, {}, `/answer/${ticket}`)).status).toBe(404);
    stream.end();
  });

  it('end with the server', async () => {
    const stream = await openStream(await admitted());
    hear!({ kind: 'open', path: 'x' });
    await stream.next();
    await loopback.close();
    expect(await stream.next()).toBeUndefined();
    loopback = await startLoopback(listener, renderer);
  });
});

describe('the socket', () => {
  it('is bound to 127.0.0.1 alone: no other address of this machine answers', async () => {
    const others = Object.values(networkInterfaces()).flatMap((list) => list ?? []);
    const hosts = ['::1', ...others.filter((at) => !at.internal && at.family === 'IPv4').map((at) => at.address)];
    for (const host of hosts) {
      const outcome = await new Promise<string>((resolve) => {
        const socket = connectSocket({ port: loopback.port, host }, () => (socket.destroy(), resolve('open')));
        socket.on('error', () => resolve('refused'));
      });
      expect(outcome, host).toBe('refused');
    }
  });

  it('says so when its port is taken', async () => {
    await expect(startLoopback(listener, renderer, loopback.port)).rejects.toMatchObject({ code: 'EADDRINUSE' });
  });
});

/** Reads the notices of a session line by line. */
async function openStream(cookie: string) {
  const lines: string[] = [];
  const waiting: ((line: string | undefined) => void)[] = [];
  let over = false;
  const put = (line: string) => {
    const wake = waiting.shift();
    if (wake) wake(line);
    else lines.push(line);
  };
  const end = () => {
    over = true;
    waiting.splice(0).forEach((wake) => wake(undefined));
  };
  const headers = { cookie, origin: `http://${ownHost()}`, 'content-type': 'application/octet-stream' };
  const request = httpRequest(
    { host: '127.0.0.1', port: loopback.port, method: 'POST', path: '/notices', headers, agent: false },
    (response) => {
      response.on('data', (part: Buffer) => part.toString().split('\n').filter(Boolean).forEach(put));
      response.on('close', end);
      response.on('error', end);
    },
  );
  request.on('error', end);
  request.end();
  await new Promise((resolve) => request.on('response', resolve));
  return {
    async next(): Promise<unknown> {
      const line =
        lines.shift() ?? (over ? undefined : await new Promise<string | undefined>((wake) => waiting.push(wake)));
      return line === undefined ? undefined : JSON.parse(line);
    },
    end: () => request.destroy(),
  };
}
