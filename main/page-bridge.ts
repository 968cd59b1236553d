import type { Bridge } from './bridge';
import { loopbackBridge } from './loopback-bridge';

declare global {
  interface Window {
    /** Put there by the desktop's preload script alone. */
    entasis?: Bridge;
  }
}

/** The bridge of this page: the desktop's where its preload put one, else the loopback that served the page. */
export async function connect(): Promise<Bridge> {
  return window.entasis ?? loopbackBridge();
}
