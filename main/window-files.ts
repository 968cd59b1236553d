import { fileURLToPath } from 'node:url';
import type { WorkerFiles } from './calls/handlers';

/** Where the parts of the window are, seen from a built entry file. */
export interface WindowFiles {
  workerFiles: WorkerFiles;
  /** Folder of the built page. */
  renderer: string;
  preload: string;
  demonstration: string;
}

/** The parts of the window beside a file of `out/main`: pass an entry's `import.meta.url`, or the address of a worker. */
export function windowFilesBeside(entry: string | URL): WindowFiles {
  const at = (path: string): URL => new URL(path, entry);
  const worker = (name: string): URL => at(`./${name}-worker.js`);
  return {
    workerFiles: { read: worker('read'), draw: worker('draw'), matrix: worker('matrix'), inspect: worker('inspect') },
    renderer: fileURLToPath(at('../renderer/')),
    preload: fileURLToPath(at('../preload/preload.cjs')),
    // A packaged program keeps it outside its archive: event readers of native code see real files only.
    demonstration: fileURLToPath(at('../../resources/demonstration/gallery.study.json')).replace(
      /([\\/])app\.asar([\\/])/,
      '$1app.asar.unpacked$2',
    ),
  };
}
