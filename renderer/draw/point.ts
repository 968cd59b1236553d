/** Where a pointer is inside the element that listens, in CSS pixels. */
export function pointIn(event: MouseEvent): { x: number; y: number } {
  const box = (event.currentTarget as Element).getBoundingClientRect();
  return { x: event.clientX - box.x, y: event.clientY - box.y };
}
