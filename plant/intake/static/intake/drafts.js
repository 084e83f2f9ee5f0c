// What is typed and not yet in the book, and what the round needs without a network, in the browser's own database.
// Stores: "drafts", one record a works, shift and person; "outbox", entries on their way, by their id; "rounds", the round of
// a works as the server last gave it; "spells", who has the tablet of a works; "photos", by their id. A new version only adds stores.

const NAME = "weirbook-round";
const VERSION = 3;
const STORES = { drafts: "key", outbox: "id", rounds: "works", spells: "works", photos: "id" };

let opened = null;

function database() {
  opened ??= new Promise((resolve, reject) => {
    const request = indexedDB.open(NAME, VERSION);
    request.onupgradeneeded = () => {
      for (const [store, keyPath] of Object.entries(STORES)) {
        if (!request.result.objectStoreNames.contains(store)) request.result.createObjectStore(store, { keyPath });
      }
    };
    request.onsuccess = () => {
      // A later version of the program in another tab must not have to wait for this one.
      request.result.onversionchange = () => { request.result.close(); opened = null; };
      resolve(request.result);
    };
    request.onerror = () => { opened = null; reject(request.error); };
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

export const keepRound = (round) => run("rounds", "readwrite", (store) => store.put(round));
export const roundOf = (works) => run("rounds", "readonly", (store) => store.get(works));
export const allRounds = () => run("rounds", "readonly", (store) => store.getAll());

export const keepSpell = (spell) => run("spells", "readwrite", (store) => store.put(spell));
export const spellOf = (works) => run("spells", "readonly", (store) => store.get(works));
export const dropSpell = (works) => run("spells", "readwrite", (store) => store.delete(works));

export const keepPhoto = (photo) => run("photos", "readwrite", (store) => store.put(photo));
export const photos = () => run("photos", "readonly", (store) => store.getAll());
export const dropPhoto = (id) => run("photos", "readwrite", (store) => store.delete(id));
