// The round without a network: puts in place what the device keeps, moved on to the shift that is on, and starts the round.

import { clock, now } from "./device.js";
import * as drafts from "./drafts.js";
import { clockText } from "./moments.js";

const place = document.getElementById("round-part");
const code = /^\/w\/([-\w]+)\//.exec(location.pathname)?.[1] ?? "";
const theme = /(?:^|; )theme=(day|night)/.exec(document.cookie)?.[1];
if (theme) document.documentElement.dataset.theme = theme;
document.getElementById("shell-again").href = location.href;
open();

async function open() {
  const kept = location.pathname.endsWith("/round/") ? await drafts.roundOf(code).catch(() => null) : null;
  if (!kept) return offer();
  clock.offsetMs = kept.offset_ms;
  const settings = { ...kept.settings, offset_ms: kept.offset_ms, from_device: true };
  const markup = new DOMParser().parseFromString(kept.html, "text/html");
  const later = moveOn(settings, markup);
  const data = markup.getElementById("round-settings") ?? document.createElement("p");
  data.textContent = JSON.stringify(settings);
  document.getElementById("place").textContent = settings.works_name;
  place.replaceChildren(...markup.body.childNodes);
  const said = document.getElementById("offline");
  said.hidden = false;
  said.textContent = `No network. This is the round as known on ${new Date(kept.kept_ms + kept.offset_ms).toLocaleDateString("en-GB", { day: "numeric", month: "short" })} at ${clockText(kept.kept_ms + kept.offset_ms, settings.zone)}${later ? ", moved on to the shift that is on" : ""}. What you enter is kept here and sent by itself.`;
  if (document.getElementById("round")) await import("./round.js");
}

// A shift that has ended since: its successor is on, and nothing of it has been taken yet.
function moveOn(settings, markup) {
  const on = settings.shifts.find((span) => span.start_ms <= now() && now() < span.end_ms);
  if (!on || on.shift === settings.shift) return false;
  settings.shift = on.shift;
  settings.starts_at = on.starts_at;
  markup.getElementById("shift").textContent = on.words;
  markup.querySelectorAll("li.line").forEach((line) => line.classList.remove("taken"));
  markup.querySelectorAll("li.line .done").forEach((done) => done.remove());
  const closed = markup.querySelector("#round-closed");
  if (closed) closed.remove();
  return true;
}

async function offer() {
  const rounds = await drafts.allRounds().catch(() => []);
  document.getElementById("shell-says").textContent = rounds.length
    ? "This page needs the network. The round does not:"
    : "This page needs the network, and this device keeps no round yet: open the round once while there is a network.";
  document.getElementById("shell-rounds").replaceChildren(...rounds.map((round) => {
    const item = document.createElement("li");
    const link = document.createElement("a");
    link.href = `/w/${round.works}/round/`;
    link.textContent = `Round of ${round.works}`;
    item.append(link);
    return item;
  }));
}
