// The list of what waits on this device: who, when, how much, and why something was refused; and the file it can be saved as.

import * as drafts from "./drafts.js";
import { clockText } from "./moments.js";
import * as photos from "./photos.js";

const place = document.getElementById("queue");
const list = document.getElementById("queue-list");

export async function showQueue(works, act = {}) {
  const entries = (await drafts.waiting().catch(() => [])).filter((entry) => works === null || entry.works === works);
  const pictures = (await drafts.photos().catch(() => [])).filter((photo) => works === null || photo.works === works).length;
  if (!place) return entries;
  place.hidden = false;
  const refused = entries.filter((entry) => entry.refused).length;
  const beside = pictures ? `${pictures} photo${pictures === 1 ? "" : "s"}` : "";
  document.getElementById("queue-count").textContent = entries.length === 0
    ? beside ? `${beside} waiting to be sent` : "nothing waiting"
    : `${entries.length - refused} waiting to be sent${refused ? `, ${refused} refused` : ""}${beside ? `, ${beside}` : ""}${oldest(entries)}`;
  list.replaceChildren(...entries.map((entry) => row(entry, act)));
  return entries;
}

function oldest(entries) {
  const days = Math.floor((Date.now() - Math.min(...entries.map((entry) => Date.parse(entry.body.made_at) || Date.now()))) / 86400000);
  return days >= 1 ? `, the oldest for ${days} day${days === 1 ? "" : "s"}` : "";
}

function row(entry, act) {
  const item = document.createElement("li");
  // On the works' clock, whatever the device's was.
  const made = Date.parse(entry.body.made_at) + (entry.body.clock_offset_s ?? 0) * 1000;
  const zone = act.zone ?? undefined;
  const day = new Date(made).toLocaleDateString("en-GB", { day: "numeric", month: "short", timeZone: zone });
  const count = entry.body.lines.length;
  const what = [count ? `${count} value${count === 1 ? "" : "s"}` : "", entry.body.close ? "closing the round" : "", entry.body.take_over ? "taking over" : ""].filter(Boolean).join(", ");
  item.textContent = `${entry.name || entry.person}, made ${day} ${clockText(made, zone)}: ${what}. `;
  const said = document.createElement("span");
  said.className = entry.refused ? "action" : "quiet";
  said.textContent = entry.refused ? `Refused: ${entry.refused}` : "Waiting.";
  item.append(said);
  if (entry.refused && act.again) {
    const button = document.createElement("button");
    button.type = "button";
    button.className = "button second small";
    button.textContent = "Try again";
    button.addEventListener("click", () => act.again(entry));
    item.append(" ", button);
  }
  return item;
}

// Everything that waits, as one file that a supervisor can read and bring in.
export async function saveQueue(works) {
  const entries = (await drafts.waiting().catch(() => [])).filter((entry) => works === null || entry.works === works);
  const kept = (await drafts.allDrafts().catch(() => [])).filter((draft) => works === null || draft.key.startsWith(`${works}|`));
  const text = JSON.stringify({ what: "entries not yet sent", saved_at: new Date().toISOString(), entries, drafts: kept, photos: await photos.asText(works) }, null, 1);
  const link = document.createElement("a");
  link.href = URL.createObjectURL(new Blob([text], { type: "application/json" }));
  link.download = `weirbook-unsent-${works ?? "all"}-${new Date().toISOString().slice(0, 16).replaceAll(":", "")}.json`;
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 10000);
}

export async function sayDevice() {
  const said = document.getElementById("device-said");
  if (!said || !navigator.storage?.persisted) return;
  const lasting = (await navigator.storage.persisted()) || (await navigator.storage.persist().catch(() => false));
  said.textContent = lasting
    ? "This browser keeps what waits here until it is sent."
    : "This browser may throw away what waits here when it runs short of room: install the round to the home screen, and send soon.";
  said.dataset.persisted = lasting ? "yes" : "no";
}
