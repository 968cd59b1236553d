import { readdir } from 'node:fs/promises';
import { extname, join } from 'node:path';

/** What the page may load and reach: its own files alone, no script in line, nothing of other hosts. */
export const CONTENT_SECURITY_POLICY = [
  "default-src 'none'",
  "script-src 'self'",
  "style-src 'self'",
  // Positions and colours of drawn things are set as style attributes; style sheets come from files alone.
  "style-src-attr 'unsafe-inline'",
  "img-src 'self' data: blob:",
  "font-src 'self'",
  "connect-src 'self'",
  "worker-src 'self'",
  "base-uri 'none'",
  "form-action 'none'",
  "frame-ancestors 'none'",
].join('; ');

/** Headers of every answer to the page, over either transport. */
export const PAGE_HEADERS: Record<string, string> = {
  'content-security-policy': CONTENT_SECURITY_POLICY,
  'cross-origin-opener-policy': 'same-origin',
  'cross-origin-embedder-policy': 'require-corp',
  'cross-origin-resource-policy': 'same-origin',
  'permissions-policy': 'camera=(), microphone=(), geolocation=(), usb=(), serial=(), hid=()',
  'referrer-policy': 'no-referrer',
  'x-content-type-options': 'nosniff',
  'cache-control': 'no-store',
};

const TYPES: Record<string, string> = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.svg': 'image/svg+xml',
  '.png': 'image/png',
  '.woff2': 'font/woff2',
  '.json': 'application/json',
};

export function typeOf(file: string): string {
  return TYPES[extname(file)] ?? 'application/octet-stream';
}

/**
 * The files of the built page by their address, `/index.html` and so on: a list made once, so that no address can name
 * anything else. Links are left out.
 */
export async function filesUnder(folder: string, prefix = '/'): Promise<Map<string, string>> {
  const files = new Map<string, string>();
  for (const entry of await readdir(folder, { withFileTypes: true })) {
    const path = join(folder, entry.name);
    if (entry.isFile()) files.set(`${prefix}${entry.name}`, path);
    else if (entry.isDirectory()) {
      for (const [address, file] of await filesUnder(path, `${prefix}${entry.name}/`)) files.set(address, file);
    }
  }
  return files;
}
