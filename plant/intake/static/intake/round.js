// The round's page: answers beside each field, keeps every keystroke on the device, and sends when told to.
// Without this script the page is one plain form that the server answers.

import { answerBlock, doneLine, olderBlock } from "./answers.js";
import * as drafts from "./drafts.js";
import { instantOf, clockText } from "./moments.js";
import { answer } from "./rules.js";
import { newId, send } from "./sending.js";
import { amountText } from "./vessels.js";

const settings = JSON.parse(document.getElementById("round-settings").textContent);
const form = document.getElementById("round");
const offsetMs = settings.now_ms - Date.now();
const now = () => Date.now() + offsetMs;
const draftKey = [settings.works, settings.shift, settings.person].join("|");
const lines = [...form.querySelectorAll("li.line")].map(makeLine);
const byKey = new Map(lines.map((line) => [line.key, line]));
const note = form.elements.namedItem("note");
let refused = "";

function makeLine(item) {
  const number = item.dataset.number;
  const field = (name) => form.elements.namedItem(`${name}-${number}`);
  const line = {
    item, number, key: item.dataset.key, site: item.dataset.site, parameter: item.dataset.parameter,
    rules: settings.rules[item.dataset.key],
    value: field("value"), unit: field("unit"), notTaken: field("not_taken"), clock: field("clock"), note: field("note"),
    shown: document.getElementById(`shown-${number}`), answers: document.getElementById(`answer-${number}`),
    inBook: item.classList.contains("taken"), atMs: null, confirmed: false, entry: null, error: "", sentText: "",
  };
  for (const input of [line.value, line.unit, line.notTaken, line.clock, line.note]) {
    input.addEventListener("input", () => changed(line, input));
  }
  line.value.addEventListener("keydown", (event) => {
    if (event.key !== "Enter") return;
    event.preventDefault();
    const following = lines.slice(lines.indexOf(line) + 1).find((other) => !other.inBook && other.entry === null);
    (following ? following.value : document.getElementById("send")).focus();
  });
  return line;
}

function changed(line, input) {
  if (input === line.value || input === line.unit) {
    line.confirmed = false;
    if (line.value.value.trim() === "") line.atMs = null;
    else line.atMs ??= now();
  } else if (line.notTaken.value) line.atMs ??= now();
  line.error = "";
  keep();
  show(line);
  showFoot();
}

function filled(line) {
  return line.value.value.trim() !== "" || line.notTaken.value !== "";
}

function taken(line) {
  return line.clock.value ? instantOf(line.clock.value, settings.zone, now()) : (line.atMs ?? now());
}

function found(line) {
  return answer(line.rules, line.value.value, line.unit.value, Math.floor(taken(line) / 1000));
}

// Why a line can't be sent yet: "" when it can.
function hindrance(line) {
  if (line.error) return "refused";
  const value = line.value.value.trim();
  if (value !== "" && line.notTaken.value !== "") return "both";
  if (value === "") return "";
  const said = found(line);
  if (said.state === "stopped") return "stopped";
  return said.doubt && !line.confirmed ? "doubt" : "";
}

function show(line) {
  const held = line.entry !== null;
  line.value.readOnly = held;
  line.item.classList.toggle("waiting", held);
  const said = filled(line) && line.value.value.trim() !== "" ? found(line) : null;
  const why = filled(line) ? hindrance(line) : "";
  line.value.toggleAttribute("aria-invalid", why === "stopped" || why === "refused");
  if (line.value.hasAttribute("aria-invalid")) line.value.setAttribute("aria-invalid", "true");
  const amount = said && said.state === "read" ? amountText(line.rules.shows, said, line.unit.value) : "";
  const read = said && said.state === "read" ? `${said.qualifier}${said.plain} ${line.unit.value}`.trim() : "";
  const doubted = why === "doubt";
  line.shown.textContent = doubted ? read : [amount, filled(line) ? `read ${clockText(taken(line), settings.zone)}` : ""].filter(Boolean).join(" · ");
  line.shown.classList.toggle("doubted", doubted);
  line.shown.hidden = line.shown.textContent === "";
  line.answers.replaceChildren(...answerBlock(line, said, why, {
    confirm: () => { line.confirmed = true; keep(); show(line); showFoot(); },
    again: () => { line.value.value = ""; line.atMs = null; keep(); show(line); showFoot(); line.value.focus(); },
    sendNow: () => sendLines([line], "line"),
  }));
}

function showFoot() {
  const answered = lines.filter((line) => line.inBook || (filled(line) && hindrance(line) === "")).length;
  const toSend = lines.filter((line) => filled(line) && line.entry === null);
  const unsure = toSend.filter((line) => hindrance(line) !== "").length;
  const held = lines.filter((line) => line.entry !== null).length;
  const said = [];
  if (toSend.length) said.push(`${toSend.length} to send`);
  if (unsure) said.push(`${unsure} want a second look`);
  if (held) said.push(`${held} waiting to be sent`);
  if (refused) said.push(refused);
  document.getElementById("count").textContent = `${answered} of ${lines.length}`;
  document.getElementById("waiting").textContent = said.join(", ");
  document.getElementById("send").textContent = toSend.length ? `Send ${toSend.length}` : "Send";
}

function keep() {
  const kept = {};
  for (const line of lines) {
    if (!filled(line) && !line.note.value && !line.clock.value) continue;
    kept[line.key] = {
      value: line.value.value, unit: line.unit.value, notTaken: line.notTaken.value, clock: line.clock.value,
      note: line.note.value, atMs: line.atMs, confirmed: line.confirmed,
    };
  }
  return drafts.keepDraft({ key: draftKey, lines: kept, note: note.value }).catch(notKept);
}

function notKept() {
  refused = "this device can’t keep drafts: send each line";
  showFoot();
}

function sentLine(line) {
  const out = {
    key: line.key, site: line.site, parameter: line.rules.sends[line.unit.value] ?? line.parameter,
    value: line.value.value.trim(), unit: line.unit.value, taken_at: new Date(taken(line)).toISOString(),
    not_taken: line.notTaken.value, note: line.note.value.trim(),
  };
  if (line.confirmed) out.confirmed = true;
  return out;
}

async function sendLines(chosen, kind, close = null) {
  const unsure = chosen.filter((line) => hindrance(line) !== "");
  const ready = chosen.filter((line) => hindrance(line) === "");
  unsure.forEach(show);
  if (unsure.length && (close !== null || ready.length === 0)) {
    unsure[0].value.focus();
    return;
  }
  if (ready.length === 0 && close === null) return;
  const entry = {
    id: newId(), works: settings.works, person: settings.person, keys: ready.map((line) => line.key),
    body: { kind, lines: ready.map(sentLine), made_at: new Date().toISOString(), clock_offset_s: Math.round(offsetMs / 1000) },
  };
  if (close !== null) entry.body.close = close;
  await drafts.keepEntry(entry).catch(notKept);
  for (const line of ready) {
    line.entry = entry.id;
    show(line);
  }
  showFoot();
  await sendEntry(entry);
}

async function sendEntry(entry) {
  const token = form.elements.namedItem("csrfmiddlewaretoken").value;
  const answered = await send(form.dataset.entries, entry, token);
  if (answered.state === "unsent") {
    refused = answered.signedOut ? "sign in again to send; nothing is lost" : "";
    lines.filter((line) => line.entry === entry.id).forEach(show);
    showFoot();
    return;
  }
  refused = "";
  await drafts.dropEntry(entry.id).catch(notKept);
  if (answered.state === "taken") await takenBy(entry, answered.body);
  else refusedBy(entry, answered.body);
  showFoot();
}

async function takenBy(entry, body) {
  entry.body.lines.forEach((sent, place) => {
    const line = byKey.get(sent.key);
    const text = sent.value === "" ? `not taken, ${sent.not_taken}` : `${sent.value} ${sent.unit}`.trim();
    const ref = (body.refs ?? [])[place];
    const address = ref ? `/w/${settings.works}/reading/${ref}/` : "";
    if (!line || !entry.keys.includes(sent.key)) {
      // From an earlier shift: it is in the book, and answers nothing that is due now.
      document.getElementById("news").append(doneLine(`${sent.site} ${sent.parameter} ${text}`, address));
      return;
    }
    line.inBook = true;
    line.entry = null;
    line.item.classList.add("sent");
    for (const input of [line.value, line.notTaken, line.clock, line.note]) input.value = "";
    line.atMs = null;
    line.confirmed = false;
    show(line);
    line.item.querySelectorAll(".done").forEach((old) => old.remove());
    line.answers.after(doneLine(text, address));
  });
  await keep();
  const news = document.getElementById("news");
  for (const finding of body.findings ?? []) {
    const item = document.createElement("p");
    item.className = `note ${finding.level}`;
    item.textContent = finding.sentence;
    news.append(item);
  }
  if (entry.body.close) {
    await drafts.dropDraft(draftKey).catch(notKept);
    location.reload();
  }
}

function refusedBy(entry, body) {
  entry.keys.forEach((key, place) => {
    const line = byKey.get(key);
    if (!line) return;
    line.entry = null;
    line.error = (body.lines ?? {})[place] ?? "";
    show(line);
  });
  refused = body.general || (entry.keys.length ? "not taken: see the lines marked" : Object.values(body.lines ?? {}).join("; "));
  const first = entry.keys.map((key) => byKey.get(key)).find((line) => line && line.error);
  first?.value.focus();
}

async function flush() {
  const work = async () => {
    for (const entry of await drafts.waiting().catch(() => [])) {
      if (entry.works === settings.works && entry.person === settings.person) await sendEntry(entry);
    }
  };
  if (navigator.locks) await navigator.locks.request("weirbook-outbox", { ifAvailable: true }, (lock) => (lock ? work() : null));
  else await work();
}

async function restore() {
  const kept = await drafts.draftOf(draftKey).catch(() => null);
  for (const [key, typed] of Object.entries(kept?.lines ?? {})) {
    const line = byKey.get(key);
    if (!line || filled(line)) continue;
    line.value.value = typed.value;
    if (Object.hasOwn(line.rules.units, typed.unit)) line.unit.value = typed.unit;
    line.notTaken.value = typed.notTaken;
    line.clock.value = typed.clock;
    line.note.value = typed.note;
    line.atMs = typed.atMs;
    line.confirmed = typed.confirmed;
  }
  if (kept?.note && !note.value) note.value = kept.note;
  for (const entry of await drafts.waiting().catch(() => [])) {
    if (entry.works !== settings.works || entry.person !== settings.person) continue;
    for (const key of entry.keys) if (byKey.has(key)) byKey.get(key).entry = entry.id;
  }
  lines.filter(filled).forEach(show);
  showFoot();
  await offerOlder();
  form.dataset.ready = "yes";
  await flush();
}

// What this person typed in an earlier shift and never sent: nothing typed is thrown away unseen.
async function offerOlder() {
  for (const old of await drafts.allDrafts().catch(() => [])) {
    const [works, shift, person] = old.key.split("|");
    const typed = Object.entries(old.lines).filter(([, line]) => line.value.trim() !== "" || line.notTaken !== "");
    if (works !== settings.works || person !== settings.person || old.key === draftKey || typed.length === 0) continue;
    document.getElementById("news").append(olderBlock(shift, typed.map(([key, line]) => `${key.replace(":", " ")} ${line.value || line.notTaken} ${line.value ? line.unit : ""}`.trim()), {
      send: async () => {
        const body = { kind: "round", lines: typed.map(([key, line]) => olderLine(key, line)), made_at: new Date().toISOString() };
        await drafts.keepEntry({ id: newId(), works, person, keys: [], body }).catch(notKept);
        await drafts.dropDraft(old.key);
        await flush();
      },
      drop: () => drafts.dropDraft(old.key),
    }));
  }
}

function olderLine(key, line) {
  const [site, parameter] = [key.slice(0, key.lastIndexOf(":")), key.slice(key.lastIndexOf(":") + 1)];
  return {
    key, site, parameter: parameter === "level" && line.unit === "L" ? "volume" : parameter, value: line.value.trim(), unit: line.unit,
    taken_at: new Date(line.atMs ?? now()).toISOString(), not_taken: line.value.trim() === "" ? line.notTaken : "", note: line.note,
    ...(line.confirmed ? { confirmed: true } : {}),
  };
}

form.addEventListener("submit", (event) => {
  event.preventDefault();
  const closing = event.submitter?.id === "close";
  const chosen = lines.filter((line) => filled(line) && line.entry === null);
  const open = lines.filter((line) => !line.inBook && !filled(line)).map((line) => line.key);
  sendLines(chosen, "round", closing ? { note: note.value, open, starts_at: settings.starts_at } : null);
});
note.addEventListener("input", keep);
window.addEventListener("online", flush);
window.addEventListener("pageshow", flush);
document.addEventListener("visibilitychange", () => { if (document.visibilityState === "visible") flush(); });
setInterval(flush, 30000);
restore();
