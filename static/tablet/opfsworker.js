// @ts-check
/**
 * The file work of the second copy: a dedicated worker, because only there a file can be appended and flushed.
 *
 * Jobs: append, write, read, list. A path is folders and a name, "runs/x.ndjson"; names are made safe here.
 */

/** @param {string} name */
const safe = (name) => encodeURIComponent(name).replaceAll("*", "%2A");

/** @param {string[]} folders @param {boolean} create */
async function folder(folders, create) {
  let at = await navigator.storage.getDirectory();
  for (const name of ["fieldkit", ...folders]) at = await at.getDirectoryHandle(safe(name), { create });
  return at;
}

/**
 * @template T
 * @param {string} path @param {(file: any) => T} work on a sync access handle
 */
async function withFile(path, work) {
  const parts = path.split("/");
  const name = /** @type {string} */ (parts.pop());
  const handle = await (await folder(parts, true)).getFileHandle(safe(name), { create: true });
  // Another tab may hold the file for a moment: the handle is exclusive.
  for (let attempt = 1; ; attempt += 1) {
    try {
      const file = await /** @type {any} */ (handle).createSyncAccessHandle();
      try {
        return work(file);
      } finally {
        file.close();
      }
    } catch (bad) {
      const busy = bad instanceof Error && bad.name === "NoModificationAllowedError";
      if (!busy || attempt === 20) throw bad;
      await new Promise((go) => setTimeout(go, 25));
    }
  }
}

/** @param {any} file @param {Uint8Array} bytes @param {number} at */
function putAll(file, bytes, at) {
  if (file.write(bytes, { at }) !== bytes.length) throw new Error("the copy was cut short");
  file.flush();
}

/** @type {Record<string, (job: any) => Promise<unknown>>} */
const JOBS = {
  append: (job) =>
    withFile(job.path, (file) => {
      const bytes = new TextEncoder().encode(`${job.text}\n`);
      let size = file.getSize();
      const last = new Uint8Array(1);
      // A line that a killed browser cut off is closed first, so that it cannot spoil the next one.
      if (size > 0 && file.read(last, { at: size - 1 }) === 1 && last[0] !== 10) {
        putAll(file, new Uint8Array([10]), size);
        size += 1;
      }
      putAll(file, bytes, size);
    }),
  write: (job) =>
    withFile(job.path, (file) => {
      putAll(file, job.bytes, 0);
      file.truncate(job.bytes.length);
      file.flush();
    }),
  read: async (job) => {
    const parts = job.path.split("/");
    const name = parts.pop();
    try {
      const handle = await (await folder(parts, false)).getFileHandle(safe(name));
      return await (await handle.getFile()).arrayBuffer();
    } catch (bad) {
      if (bad instanceof Error && bad.name === "NotFoundError") return null;
      throw bad;
    }
  },
  list: async (job) => {
    try {
      const names = [];
      for await (const name of /** @type {any} */ (await folder(job.path.split("/"), false)).keys()) names.push(decodeURIComponent(name));
      return names;
    } catch (bad) {
      if (bad instanceof Error && bad.name === "NotFoundError") return [];
      throw bad;
    }
  },
};

globalThis.onmessage = async ({ data }) => {
  try {
    globalThis.postMessage({ id: data.id, value: await JOBS[data.op](data) });
  } catch (bad) {
    globalThis.postMessage({ id: data.id, bad: bad instanceof Error ? `${bad.name}: ${bad.message}` : String(bad) });
  }
};
