// Photos of a line: shrunk on the device, kept in the browser's own database, sent after the entry they belong to.
// A photo is taken for a draft ("draft" says whose); once its line is sent it is bound to that entry ("about").

import * as drafts from "./drafts.js";
import { newId, token } from "./sending.js";

const LONGEST_PX = 1600;
const QUALITY = 0.8;
const WAIT_MS = 30000;

// A picture of at most 1600 points on its longer side, without what a camera writes beside it (place, owner).
export async function shrink(file) {
  const picture = await createImageBitmap(file);
  const scale = Math.min(1, LONGEST_PX / Math.max(picture.width, picture.height));
  const canvas = document.createElement("canvas");
  canvas.width = Math.max(1, Math.round(picture.width * scale));
  canvas.height = Math.max(1, Math.round(picture.height * scale));
  canvas.getContext("2d").drawImage(picture, 0, 0, canvas.width, canvas.height);
  picture.close();
  return new Promise((resolve, reject) => canvas.toBlob((blob) => (blob ? resolve(blob) : reject(new Error("no picture"))), "image/jpeg", QUALITY));
}

export async function keep(file, line, madeMs, of) {
  const blob = await shrink(file);
  const photo = {
    id: newId(), ...of, key: line.key, site: line.site, parameter: line.parameter, about: line.inBook ? line.sentIn : "", made_at: new Date(madeMs).toISOString(),
    name: `${line.site}-${line.parameter}.jpg`.replaceAll(/[^-\w.]/g, "_"), content: await blob.arrayBuffer(),
  };
  await drafts.keepPhoto(photo);
  return photo;
}

export async function ofDraft(draft) {
  return (await drafts.photos().catch(() => [])).filter((photo) => photo.draft === draft);
}

// The photos of these lines go with this entry.
export async function bind(draft, keys, entry) {
  for (const photo of await ofDraft(draft)) if (photo.about === "" && keys.includes(photo.key)) await drafts.keepPhoto({ ...photo, about: entry });
}

// The entry came back: its photos stay with their lines.
export async function unbind(entry) {
  for (const photo of await drafts.photos()) if (photo.about === entry) await drafts.keepPhoto({ ...photo, about: "" });
}

// Sends what is bound to an entry that is no longer waiting, and says of each that it went; stops at the first that can't go now.
export async function flush(works, mine, form, went) {
  const waiting = new Set((await drafts.waiting().catch(() => [])).map((entry) => entry.id));
  for (const photo of await drafts.photos().catch(() => [])) {
    if (photo.works !== works || !mine(photo) || photo.about === "" || photo.refused || waiting.has(photo.about)) continue;
    const answer = await put(photo, token(form));
    if (answer === null || answer.status === 401 || answer.status === 403 || answer.type === "opaqueredirect" || answer.status >= 500) break;
    if (answer.status === 200 || answer.status === 201) {
      await drafts.dropPhoto(photo.id);
      went(photo);
    } else {
      const body = await answer.json().catch(() => ({}));
      await drafts.keepPhoto({ ...photo, refused: body.general || "not taken" });
    }
  }
}

async function put(photo, key) {
  const said = new URLSearchParams({
    about: photo.about, site: photo.site, parameter: photo.parameter, made_at: photo.made_at, name: photo.name, person: photo.person, spell: photo.spell ?? "",
  });
  try {
    return await fetch(`/w/${photo.works}/photos/${photo.id}?${said}`, {
      method: "PUT", headers: { "Content-Type": "image/jpeg", "X-CSRFToken": key }, body: photo.content,
      credentials: "same-origin", redirect: "manual", signal: AbortSignal.timeout(WAIT_MS),
    });
  } catch {
    return null;
  }
}

// The field for photos under a line, and its small pictures. `owner()` says whose they are, or null while nobody has the tablet.
export function photosOf(line, owner, now, { say, send }) {
  const input = document.getElementById(`photo-${line.number}`);
  const list = document.getElementById(`photos-${line.number}`);
  if (!input) return { show: () => {}, sent: () => {} };
  input.closest(".field").hidden = false;
  let inBook = 0;

  async function show() {
    const of = owner();
    const kept = of === null ? [] : (await ofDraft(of.draft)).filter((photo) => photo.key === line.key);
    const items = await Promise.all(kept.map((photo, place) => thumb(photo, place, remove)));
    if (inBook && of !== null) items.push(words("li", "small settled", inBook === 1 ? "1 photo in the book" : `${inBook} photos in the book`));
    list.replaceChildren(...items);
    list.hidden = items.length === 0;
  }
  async function remove(photo) {
    await drafts.dropPhoto(photo.id);
    await show();
  }
  input.addEventListener("change", async () => {
    const of = owner();
    const [file] = input.files;
    if (!file || of === null) return;
    try {
      await keep(file, line, now(), of);
    } catch {
      say("that file is no picture this device can read, or there is no room for it");
    }
    input.value = "";
    await show();
    if (line.inBook) await send();
  });
  return { show, sent: () => { inBook += 1; return show(); } };
}

// Drawn, not linked: the page may show no picture that does not come from its own server.
async function thumb(photo, place, remove) {
  const item = document.createElement("li");
  const canvas = document.createElement("canvas");
  const picture = await createImageBitmap(new Blob([photo.content], { type: "image/jpeg" }));
  canvas.height = 96;
  canvas.width = Math.max(1, Math.round((96 * picture.width) / picture.height));
  canvas.getContext("2d").drawImage(picture, 0, 0, canvas.width, canvas.height);
  canvas.setAttribute("role", "img");
  canvas.setAttribute("aria-label", `Photo ${place + 1}`);
  item.append(canvas);
  if (photo.about === "") {
    const button = words("button", "button second small", "Remove photo");
    button.type = "button";
    button.addEventListener("click", () => remove(photo));
    item.append(words("span", "small quiet", "goes with the value"), button);
  } else item.append(words("span", photo.refused ? "small action" : "small quiet", photo.refused ? `Refused: ${photo.refused}` : "waiting to be sent"));
  return item;
}

function words(kind, style, text) {
  const out = document.createElement(kind);
  out.className = style;
  out.textContent = text;
  return out;
}

// For the file of what waits: the same photos as text.
export async function asText(works) {
  return (await drafts.photos().catch(() => []))
    .filter((photo) => works === null || photo.works === works)
    .map(({ content, ...photo }) => ({ ...photo, jpeg_base64: btoa(new Uint8Array(content).reduce((text, byte) => text + String.fromCharCode(byte), "")) }));
}
