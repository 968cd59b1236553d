import { contextBridge, ipcRenderer, webUtils } from 'electron';
import type { Bridge, Notice } from './bridge';
import { CALL, DROP, NOTICE } from './electron/channels';

const listeners = new Set<(notice: Notice) => void>();
ipcRenderer.on(NOTICE, (_event, notice: Notice) => listeners.forEach((listener) => listener(notice)));

const bridge: Bridge = {
  transport: 'desktop',
  call: (name, argument) => ipcRenderer.invoke(CALL, name, argument),
  listen(listener) {
    listeners.add(listener);
    return () => void listeners.delete(listener);
  },
  pathOf(file) {
    // Only a file that the user dropped or picked has a path here: the page cannot make one up.
    const path = webUtils.getPathForFile(file);
    return path !== '' && ipcRenderer.sendSync(DROP, path) === true ? path : null;
  },
  // The page never outlives the process behind it.
  ended: new Promise(() => undefined),
};

contextBridge.exposeInMainWorld('entasis', bridge);
