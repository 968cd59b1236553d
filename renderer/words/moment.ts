/** A moment in the user's own time zone, as ISO 8601 writes it, without seconds: `2026-12-01 09:05`. */
export function moment(milliseconds: number): string {
  const d = new Date(milliseconds);
  const two = (n: number) => String(n).padStart(2, '0');
  return `${d.getFullYear()}-${two(d.getMonth() + 1)}-${two(d.getDate())} ${two(d.getHours())}:${two(d.getMinutes())}`;
}
