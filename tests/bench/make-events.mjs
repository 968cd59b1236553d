import { createWriteStream } from 'node:fs';
import { once } from 'node:events';

/**
 * Writes `rows` tagged events as CSV, with the columns such files usually have: run, event, true and reconstructed value
 * (empty where lost), weight, quality, and two that nobody asks for. Seeded.
 */
export async function writeEvents(path, rows) {
  const uniform = sequence(12345);
  const out = createWriteStream(path);
  let text = 'run,event,t,r,weight,quality,theta,phi\n';
  for (let i = 0; i < rows; i++) {
    const t = -200 * Math.log(1 - uniform() * 0.7);
    const noise = uniform() + uniform() + uniform() + uniform() - 2;
    const r = uniform() < 0.08 ? '' : (t * (0.98 + 0.05 * noise) + noise).toFixed(3);
    const angles = `${(uniform() * 3.1415).toFixed(4)},${(uniform() * 6.283 - 3.1415).toFixed(4)}`;
    text += `${1 + (i % 12)},${i},${t.toFixed(4)},${r},${(0.5 + uniform()).toFixed(3)},${(i * 7) % 5},${angles}\n`;
    if (text.length > 1 << 20) {
      if (!out.write(text)) await once(out, 'drain');
      text = '';
    }
  }
  out.end(text);
  await once(out, 'finish');
}

/** Uniforms in [0, 1), a Weyl sequence put through the finaliser of MurmurHash3: enough to make work. */
function sequence(seed) {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x9e3779b9) >>> 0;
    let z = state;
    z = Math.imul(z ^ (z >>> 16), 0x85ebca6b);
    z = Math.imul(z ^ (z >>> 13), 0xc2b2ae35);
    return ((z ^ (z >>> 16)) >>> 0) / 2 ** 32;
  };
}
