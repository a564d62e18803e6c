// Every bench that compares with numpy or scipy, one after the other; each prints its ratios and their targets.
import { existsSync } from 'node:fs';

for (const name of ['modes', 'spatial', 'projection']) {
  const file = new URL(`./${name}.mjs`, import.meta.url);
  if (!existsSync(file)) continue;
  console.log(`\n== ${name} ==`);
  const { bench } = await import(file.href);
  await bench();
}
