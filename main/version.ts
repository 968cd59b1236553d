import { version } from '../package.json';

/** The program's version, as the package states it. */
export const VERSION: string = version;
