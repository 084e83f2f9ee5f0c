// Opens the round without a network. Keeps the shell and its files, nothing that holds data: the round's own data lies in
// the browser's database, put there by the page itself. `made` (version, shell, files) stands above this line.

const CACHE = `weirbook-${made.version}`;
const FILES = new Set(made.files);
const HASHED = /\.[0-9a-f]{12}\.[a-z0-9]+$/;
const PATIENCE_MS = 6000;

self.addEventListener("install", (event) => event.waitUntil(install()));
self.addEventListener("activate", (event) => event.waitUntil(activate()));
self.addEventListener("fetch", (event) => {
  const url = new URL(event.request.url);
  if (event.request.method !== "GET" || url.origin !== self.location.origin) return;
  if (event.request.mode === "navigate") event.respondWith(navigate(event.request));
  else if (FILES.has(url.pathname)) event.respondWith(file(event.request, url.pathname));
});

async function install() {
  const cache = await caches.open(CACHE);
  await cache.addAll([made.shell, ...made.files].map((path) => new Request(path, { cache: "no-cache" })));
  await self.skipWaiting();
}

async function activate() {
  const names = await caches.keys();
  await Promise.all(names.filter((name) => name.startsWith("weirbook-") && name !== CACHE).map((name) => caches.delete(name)));
  await self.clients.claim();
}

// The network first; where it fails, or does not answer in time, the shell.
async function navigate(request) {
  const shell = () => caches.match(made.shell);
  try {
    const late = new Promise((_, reject) => setTimeout(() => reject(new Error("late")), PATIENCE_MS));
    const answer = await Promise.race([fetch(request), late]);
    return answer.status >= 502 && answer.status <= 504 ? ((await shell()) ?? answer) : answer;
  } catch (problem) {
    const kept = await shell();
    if (kept) return kept;
    throw problem;
  }
}

// A name with a hash never changes its content; any other is asked for first.
async function file(request, path) {
  const kept = await caches.match(path);
  if (kept && HASHED.test(path)) return kept;
  try {
    return await fetch(request);
  } catch (problem) {
    if (kept) return kept;
    throw problem;
  }
}
