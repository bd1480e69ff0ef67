// @ts-check
/**
 * The service worker: keeps the tablet's page and its files, and serves them when there is no network, or a bad one.
 *
 * The server writes one line above this text: SHELL {build, page, files: [{url, sha256}]}. All files or none: each is
 * fetched past the HTTP cache, without cookies, without redirects, and must hash to its name. It answers for these
 * files and for pages under /app/ only; /api, the desk, PDFs and ranges go by untouched. It never takes over by itself,
 * and it never touches anything but its own caches.
 */

/** @typedef {{build: string, page: string, files: {url: string, sha256: string}[]}} Shell */
/** @type {ServiceWorkerGlobalScope} */
const worker = /** @type {any} */ (self);
const PREFIX = "fieldkit-shell-";
/** @type {Shell} */
// @ts-ignore: SHELL is the line that the server writes above
const shell = SHELL;
const CACHE = PREFIX + shell.build;
const KNOWN = new Set(shell.files.map((file) => file.url));

/** @param {ArrayBuffer} bytes */
async function hashOf(bytes) {
  return Array.from(new Uint8Array(await crypto.subtle.digest("SHA-256", bytes)), (b) => b.toString(16).padStart(2, "0")).join("");
}

/** @param {Cache} cache @param {{url: string, sha256: string}} file */
async function keep(cache, file) {
  const reply = await fetch(new Request(file.url, { cache: "reload", redirect: "error", credentials: "omit" }));
  if (reply.status !== 200 || reply.redirected || reply.type !== "basic") throw new Error(`${file.url}: status ${reply.status}`);
  const bytes = await reply.clone().arrayBuffer();
  if ((await hashOf(bytes)) !== file.sha256) throw new Error(`${file.url}: not the file that the list names`);
  await cache.put(file.url, reply);
}

async function install() {
  const cache = await caches.open(CACHE);
  try {
    // A few at a time: a bad link that carries one file carries none of sixty at once.
    const left = [...shell.files];
    const lane = async () => {
      for (let file = left.shift(); file; file = left.shift()) await keep(cache, file);
    };
    await Promise.all(Array.from({ length: 4 }, lane));
  } catch (bad) {
    await caches.delete(CACHE);
    throw bad;
  }
}

async function activate() {
  for (const name of await caches.keys()) if (name.startsWith(PREFIX) && name !== CACHE) await caches.delete(name);
  // Only a page that had no worker before is taken: its files are the same as these. Nothing is reloaded.
  await worker.clients.claim();
}

/** @returns {Promise<string[]>} what is not aboard, or not as it should be */
async function missing() {
  if (!(await caches.has(CACHE))) return shell.files.map((file) => file.url);
  const cache = await caches.open(CACHE);
  const bad = [];
  for (const file of shell.files) {
    const kept = await cache.match(file.url);
    if (!kept || (await hashOf(await kept.arrayBuffer())) !== file.sha256) bad.push(file.url);
  }
  return bad;
}

/** @returns {Promise<string[]>} as `missing`, by name alone: quick enough for every start */
async function absent() {
  if (!(await caches.has(CACHE))) return shell.files.map((file) => file.url);
  const cache = await caches.open(CACHE);
  const there = new Set((await cache.keys()).map((request) => new URL(request.url).pathname));
  return shell.files.map((file) => file.url).filter((url) => !there.has(url));
}

/** @param {string[]} names the page that is shown where a blank one would be */
function apology(names) {
  const text = `<!doctype html><html lang="en"><meta charset="utf-8"><meta name="viewport" content="width=device-width">
<title>fieldkit: app files are missing</title><main><h1>App files are missing on this tablet</h1>
<p>The browser has dropped ${names.length} of ${shell.files.length} files of this app. What you recorded is stored elsewhere and has not been touched.</p>
<p>Connect to the server's network once and open this page again. Until then go on by paper; make safe by the list at the cabinet.</p>
</main></html>`;
  return new Response(text, { status: 503, headers: { "Content-Type": "text/html; charset=utf-8", "Content-Security-Policy": "default-src 'none'" } });
}

/** @param {Request} request */
async function page(request) {
  const gone = await absent();
  if (gone.length === 0) {
    const cache = await caches.open(CACHE);
    const kept = await cache.match(shell.page);
    if (kept) return kept;
  }
  // The network may still have the page, in whatever version the server is now.
  try {
    const reply = await fetch(request, { signal: AbortSignal.timeout(8000) });
    if (reply.ok && !reply.redirected && (reply.headers.get("Content-Type") ?? "").startsWith("text/html") && reply.headers.has("Content-Security-Policy")) {
      await repair(gone);
      return reply;
    }
  } catch {
    // no network: said below
  }
  return apology(gone);
}

/** Fetches again what the browser dropped, as far as it is still the same. @param {string[]} names */
async function repair(names) {
  const cache = await caches.open(CACHE);
  await Promise.all(shell.files.filter((file) => names.includes(file.url)).map((file) => keep(cache, file).catch(() => undefined)));
}

/** @param {Request} request */
async function file(request) {
  const cache = await caches.open(CACHE);
  return (await cache.match(new URL(request.url).pathname)) ?? fetch(request);
}

worker.addEventListener("install", (event) => event.waitUntil(install()));
worker.addEventListener("activate", (event) => event.waitUntil(activate()));

worker.addEventListener("message", (event) => {
  const port = event.ports[0];
  if (event.data?.ask === "ready") {
    event.waitUntil(missing().then((gone) => port?.postMessage({ ready: gone.length === 0, missing: gone, build: shell.build })));
  } else if (event.data?.ask === "take over") event.waitUntil(worker.skipWaiting());
});

worker.addEventListener("fetch", (event) => {
  const { request } = event;
  const url = new URL(request.url);
  if (request.method !== "GET" || url.origin !== worker.location.origin || request.headers.has("Range")) return;
  if (request.mode === "navigate") {
    if (url.pathname.startsWith("/app/")) event.respondWith(page(request));
  } else if (KNOWN.has(url.pathname) && url.pathname !== shell.page) event.respondWith(file(request));
});
