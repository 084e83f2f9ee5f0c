// A tablet that has been withdrawn: what it has not sent can still be taken off it.

import { saveQueue, showQueue } from "./queue.js";

const code = /^\/w\/([-\w]+)\//.exec(location.pathname)?.[1] ?? null;
document.getElementById("queue-save").addEventListener("click", () => saveQueue(code));
showQueue(code);
