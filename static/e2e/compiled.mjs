// The modules of the pages for Node: types stripped by tsc, each import a new instance where asked, as a second window
// of the browser would have it.
import { execFileSync } from 'node:child_process';
import { cpSync, rmSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const here = path.dirname(fileURLToPath(import.meta.url));
const modules = path.join(here, '..', 'node_modules');
const folder = path.join(modules, '.cache', `units-${process.pid}`); // below node_modules: bare imports resolve from there
const built = path.join(folder, 'built');

/** Compiles once; returns a function that opens a "window": its own instances of all modules. */
export function compile() {
  process.on('exit', () => rmSync(folder, { recursive: true, force: true }));
  const tsc = path.join(modules, 'typescript', 'bin', 'tsc');
  execFileSync(process.execPath, [tsc, '-p', path.join(here, 'units.tsconfig.json'), '--outDir', built], {
    stdio: ['ignore', 'inherit', 'inherit'],
  });
  let count = 0;
  return async function openWindow(...names) {
    const copy = path.join(folder, String(++count)); // Node keeps one instance a path
    cpSync(built, copy, { recursive: true });
    const opened = {};
    for (const name of names) Object.assign(opened, await import(pathToFileURL(path.join(copy, `${name}.js`)).href));
    return opened;
  };
}
