import { readFileSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import asc from 'assemblyscript/asc';
import type { Plugin } from 'vite';

const QUERY = '?assembly';

/** Vite plugin: `import base64 from './x.as?assembly'` builds `x.as.ts` to WebAssembly and gives its bytes in base64. */
export function assembly(): Plugin {
  return {
    name: 'assembly',
    enforce: 'pre',
    resolveId(source, importer) {
      return importer && source.endsWith(QUERY)
        ? `${resolve(dirname(importer), source.slice(0, -QUERY.length))}.ts${QUERY}`
        : null;
    },
    async load(id) {
      if (!id.endsWith(QUERY)) return null;
      const path = id.slice(0, -QUERY.length);
      this.addWatchFile(path);
      return `export default '${await built(path)}';`;
    },
  };
}

async function built(path: string): Promise<string> {
  const bytes: Uint8Array[] = [];
  const { error, stderr } = await asc.main(
    [
      'module.ts',
      '--outFile',
      'module.wasm',
      '-O3',
      '--noAssert',
      '--runtime',
      'stub',
      '--use',
      'abort=',
      '--importMemory',
      '--enable',
      'simd',
    ],
    {
      readFile: (name: string) => (name === 'module.ts' ? readFileSync(path, 'utf8') : null),
      writeFile: (name, contents) => void (name === 'module.wasm' && bytes.push(contents as Uint8Array)),
      listFiles: () => [],
    },
  );
  if (error) throw new Error(`${path}: ${stderr.toString() || error.message}`);
  return Buffer.from(bytes[0]).toString('base64');
}
