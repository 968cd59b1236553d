import { existsSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve, sep } from 'node:path';
import asc from 'assemblyscript/asc';
import type { Plugin } from 'vite';

const QUERY = '?assembly';
/** No runtime: a module works in memory that is laid out for it, and calls nothing. */
const OPTIONS = '-O3 --noAssert --runtime stub --use abort= --importMemory --enable simd --outFile module.wasm'.split(
  ' ',
);

/**
 * Vite plugin: `import base64 from './x.as?assembly'` builds `x.as.ts`, with what it imports, to WebAssembly and gives its bytes in
 * base64.
 */
export function assembly(): Plugin {
  return {
    name: 'assembly',
    enforce: 'pre',
    resolveId(source, importer) {
      if (!importer || !source.endsWith(QUERY)) return null;
      return `${resolve(dirname(importer), source.slice(0, -QUERY.length))}.ts${QUERY}`;
    },
    async load(id) {
      if (!id.endsWith(QUERY)) return null;
      const { wasm, read } = await built(id.slice(0, -QUERY.length));
      for (const path of read) this.addWatchFile(path);
      return `export default '${Buffer.from(wasm).toString('base64')}';`;
    },
  };
}

async function built(path: string): Promise<{ wasm: Uint8Array; read: string[] }> {
  const root = process.cwd();
  const read: string[] = [];
  let wasm = new Uint8Array(0);
  const { error, stderr } = await asc.main([relative(root, path).split(sep).join('/'), ...OPTIONS], {
    readFile(name: string) {
      const file = join(root, name);
      if (!existsSync(file)) return null;
      read.push(file);
      return readFileSync(file, 'utf8');
    },
    writeFile(_, contents) {
      wasm = Uint8Array.from(contents as Uint8Array);
    },
    listFiles: () => [],
  });
  if (error) throw new Error(`${path}: ${stderr.toString() || error.message}`);
  return { wasm, read };
}
