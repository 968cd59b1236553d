import type { Bridge } from '../bridge';
import { decode, encode } from './codec';
import { loopbackBridge } from './loopback-bridge';

declare global {
  interface Window {
    /** Put there by the desktop's preload script alone. */
    entasis?: Bridge;
  }
}

/** The bridge of this page: the desktop's where its preload put one, else the loopback that served the page. */
export async function connect(): Promise<Bridge> {
  return window.entasis ? desktopBridge(window.entasis) : loopbackBridge();
}

/**
 * Electron clones what it is given and refuses proxies, such as those of reactive state: arguments are made plain here,
 * as they are on their way over the loopback.
 */
function desktopBridge(bridge: Bridge): Bridge {
  return { ...bridge, call: (name, argument) => bridge.call(name, decode(encode(argument)) as typeof argument) };
}
