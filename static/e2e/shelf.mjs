// Serves a built static/gen by itself, any version of it, so that what the service worker does with versions, holes and
// dead servers can be shown. It knows no log: /api answers 503.
import { readFileSync } from 'node:fs';
import http from 'node:http';
import path from 'node:path';
import { fileURLToPath } from 'node:url';

const gen = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', 'gen');

const types = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.json': 'application/json; charset=utf-8',
  '.png': 'image/png',
  '.wasm': 'application/wasm',
  '.woff2': 'font/woff2',
  '.txt': 'text/plain; charset=utf-8',
};

const names = { '/': 'index.html', '/desk': 'desk.html', '/sw.js': 'sw.js', '/manifest.json': 'manifest.json' };

/** The list that the service worker keeps, as built. */
export function precache() {
  const self = {};
  new Function('self', readFileSync(path.join(gen, 'precache.js'), 'utf8'))(self);
  return self.precache;
}

export class Shelf {
  /** Changed in the page and in the list: another version of the same files. */
  version = null;
  /** Paths that answer 404. */
  missing = new Set();
  requests = [];
  #server = null;
  port = 0;

  async open(port = 0) {
    this.#server = http.createServer((request, response) => this.#answer(request, response));
    await new Promise((resolve) => this.#server.listen(port, '127.0.0.1', resolve));
    this.port = this.#server.address().port;
    return `http://127.0.0.1:${this.port}`;
  }

  async close() {
    this.#server?.closeAllConnections();
    await new Promise((resolve) => (this.#server ? this.#server.close(resolve) : resolve()));
    this.#server = null;
  }

  #answer(request, response) {
    const { pathname } = new URL(request.url, 'http://localhost');
    this.requests.push(pathname);
    if (pathname.startsWith('/api')) {
      response.writeHead(503, { 'Content-Type': 'application/problem+json' }).end('{"title":"no log here","status":503}');
      return;
    }
    let content;
    const name = names[pathname] ?? pathname.replace(/^\/gen\//, '');
    try {
      if (this.missing.has(pathname)) throw new Error('missing');
      content = readFileSync(path.join(gen, path.basename(name)));
    } catch {
      response.writeHead(404, { 'Content-Type': 'text/plain' }).end('not found');
      return;
    }
    if (this.version !== null && name === 'index.html') content = String(content).replace(/data-release="[^"]*"/, `data-release="${this.version}"`);
    if (this.version !== null && name === 'precache.js') content = String(content).replace(/version: "[^"]*"/, `version: "${this.version}"`);
    const kept = /-[A-Z2-7]{8}\.\w+$/.test(name);
    response
      .writeHead(200, { 'Content-Type': types[path.extname(name)], 'Cache-Control': kept ? 'public, max-age=31536000, immutable' : 'no-cache' })
      .end(content);
  }
}
