// Keeps one version of the phone page whole: page, script, style, wasm and fonts that belong together. It never touches
// readings (they are in IndexedDB, and the page's outbox sends them), never answers /api, and never takes over by itself.
importScripts('/gen/precache.js'); // sets self.precache = {version, files}; this file never changes, that one does

const PREFIX = 'crossplumb ';
const OWN = PREFIX + self.precache.version;

self.addEventListener('install', (event) => {
  // 'reload' goes past the HTTP cache: an old file must not slip into the new version. One failure fails the install.
  event.waitUntil(
    caches.open(OWN).then((cache) => cache.addAll(self.precache.files.map((file) => new Request(file, { cache: 'reload' })))),
  );
});

self.addEventListener('activate', (event) => {
  // The version before stays one turn longer: a second window may still run it, and its file names hold their hash.
  const clean = async () => {
    const names = (await caches.keys()).filter((name) => name.startsWith(PREFIX) && name !== OWN);
    await Promise.all(names.slice(0, -1).map((name) => caches.delete(name)));
    await self.clients.claim();
  };
  event.waitUntil(clean());
});

self.addEventListener('message', (event) => {
  if (event.data === 'take over') self.skipWaiting(); // sent only after a person said yes
  if (event.data === 'ready?') {
    const answer = async () => {
      const kept = await Promise.all(self.precache.files.map(own));
      event.ports[0].postMessage({ version: self.precache.version, ready: kept.every(Boolean) });
    };
    event.waitUntil(answer());
  }
});

self.addEventListener('fetch', (event) => {
  const { request } = event;
  const url = new URL(request.url);
  if (request.method !== 'GET' || url.origin !== self.location.origin) return;
  if (url.pathname.startsWith('/api') || url.searchParams.has('no-sw')) return; // ?no-sw: the way past this worker

  if (request.mode === 'navigate') {
    if (url.pathname === '/') event.respondWith(own('/').then((page) => page ?? fetch(request)));
    // Other pages come from the server; where there is none, the phone page is better than the browser's error.
    else event.respondWith(fetch(request).catch(async () => (await own('/')) ?? Response.error()));
  } else if (self.precache.files.includes(url.pathname)) {
    event.respondWith(own(url.pathname).then((file) => file ?? fetch(request)));
  } else if (url.pathname.startsWith('/gen/')) {
    event.respondWith(before(url.pathname).then((file) => file ?? fetch(request)));
  }
});

// By name: caches.open would make an empty cache again after ?no-sw has taken it away.
function own(path) {
  return caches.match(path, { cacheName: OWN });
}

async function before(path) {
  for (const name of await caches.keys()) {
    const file = name.startsWith(PREFIX) && (await caches.match(path, { cacheName: name }));
    if (file) return file;
  }
}
