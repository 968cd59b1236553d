import { readFile } from 'node:fs/promises';
import type { Protocol } from 'electron';
import { filesUnder, PAGE_HEADERS, typeOf } from '../page/page-files';

/** The desktop's page has a scheme of its own: `file:` could reach the whole disk. */
export const SCHEME = 'entasis';
export const PAGE = `${SCHEME}://window/`;

/** Privileges of the scheme, to be registered before the program is ready. */
export const PRIVILEGES = [{ scheme: SCHEME, privileges: { standard: true, secure: true, supportFetchAPI: true } }];

/** Serves the built page in `folder` under `entasis://window/`, and nothing else. */
export async function servePage(protocol: Protocol, folder: string): Promise<void> {
  const files = await filesUnder(folder);
  protocol.handle(SCHEME, async (request) => {
    const { host, pathname } = new URL(request.url);
    const file = host === 'window' ? files.get(pathname === '/' ? '/index.html' : pathname) : undefined;
    if (file === undefined || request.method !== 'GET')
      return new Response('not found', { status: 404, headers: PAGE_HEADERS });
    return new Response(await readFile(file), { headers: { ...PAGE_HEADERS, 'content-type': typeOf(file) } });
  });
}
