/** Pixels around the pictures of this stage: the same for all, so that they stand above one another to the pixel. */
export const MARGIN = { left: 72, right: 16, top: 28, bottom: 44 };
