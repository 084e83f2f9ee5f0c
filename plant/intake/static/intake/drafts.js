// What is typed and not yet in the book, kept in the browser's own database until the server has answered.
// Two stores: "drafts", one record a works, shift and person; "outbox", entries on their way, by their id.

const NAME = "weirbook-round";
const VERSION = 1;

let opened = null;

function database() {
  opened ??= new Promise((resolve, reject) => {
    const request = indexedDB.open(NAME, VERSION);
    request.onupgradeneeded = () => {
      request.result.createObjectStore("drafts", { keyPath: "key" });
      request.result.createObjectStore("outbox", { keyPath: "id" });
    };
    request.onsuccess = () => resolve(request.result);
    request.onerror = () => reject(request.error);
  });
  return opened;
}

async function run(store, mode, work) {
  const base = await database();
  return new Promise((resolve, reject) => {
    const transaction = base.transaction(store, mode, mode === "readwrite" ? { durability: "strict" } : {});
    const request = work(transaction.objectStore(store));
    transaction.oncomplete = () => resolve(request.result);
    transaction.onabort = transaction.onerror = () => reject(transaction.error);
  });
}

export const keepDraft = (draft) => run("drafts", "readwrite", (store) => store.put(draft));
export const draftOf = (key) => run("drafts", "readonly", (store) => store.get(key));
export const allDrafts = () => run("drafts", "readonly", (store) => store.getAll());
export const dropDraft = (key) => run("drafts", "readwrite", (store) => store.delete(key));

export const keepEntry = (entry) => run("outbox", "readwrite", (store) => store.put(entry));
export const dropEntry = (id) => run("outbox", "readwrite", (store) => store.delete(id));
export const waiting = () => run("outbox", "readonly", (store) => store.getAll());
