/** Names of the desktop's channels: the page's preload script and the main process know no other. */
export const CALL = 'entasis:call';
export const NOTICE = 'entasis:notice';
export const DROP = 'entasis:drop';
