// The round's page: answers beside each field, keeps every keystroke on the device, and sends when told to.
// Without this script the page is one plain form that the server answers.

import { answerBlock, doneLine, olderBlock } from "./answers.js";
import { clock, keepRound, measured, now, refetch, register, showClock } from "./device.js";
import { drawdownTimer } from "./drawdown.js";
import * as drafts from "./drafts.js";
import { flowOf, lastsText, neededText } from "./feeding.js";
import { instantOf, clockText } from "./moments.js";
import { saveQueue, sayDevice, showQueue } from "./queue.js";
import * as photos from "./photos.js";
import { answer } from "./rules.js";
import { hasToken, newId, send, token } from "./sending.js";
import { Tablet } from "./tablet.js";
import { amountText, contentOf } from "./vessels.js";

const settings = JSON.parse(document.getElementById("round-settings").textContent);
const form = document.getElementById("round");
const asGiven = document.getElementById("round-part").innerHTML;
clock.offsetMs = settings.offset_ms ?? settings.now_ms - Date.now();
// Who enters: the person signed in, or whoever has the shared tablet; nobody while it is locked.
let who = settings.tablet ? null : { person: settings.person, name: settings.name, spell: "" };
const draftKey = () => [settings.works, settings.shift, who?.person ?? ""].join("|");
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
    shown: document.getElementById(`shown-${number}`), reckoned: document.getElementById(`reckoned-${number}`), answers: document.getElementById(`answer-${number}`),
    inBook: item.classList.contains("taken"), sentIn: item.dataset.entry ?? "", atMs: null, confirmed: false, entry: null, error: "", sentText: "",
  };
  for (const input of [line.value, line.unit, line.notTaken, line.clock, line.note]) {
    input.addEventListener("input", () => changed(line, input));
  }
  line.value.addEventListener("keydown", (event) => {
    if (event.key !== "Enter") return;
    event.preventDefault();
    const following = lines.slice(lines.indexOf(line) + 1).find((other) => !other.inBook && other.entry === null);
    (following ? following.value : document.getElementById("send")).focus();
    (following ? following.item : document.getElementById("send")).scrollIntoView({ block: "center" });
  });
  if (line.parameter === "drawdown") drawdownTimer(line, changed);
  const owner = () => (who === null ? null : { works: settings.works, shift: settings.shift, person: who.person, spell: who.spell, draft: draftKey() });
  line.photos = photos.photosOf(line, owner, now, { say: (words) => { refused = words; showFoot(); }, send: () => flush() });
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
  // A new flow changes what every feeder needs and how long every tank lasts.
  if (line.parameter === "totaliser") lines.forEach(reckon);
  showFoot();
}

function flow(meter) {
  const line = byKey.get(`${meter}:totaliser`);
  const typed = line && line.value.value.trim() !== "" ? found(line) : null;
  return flowOf(settings.feeding, meter, line, typed, line ? taken(line) : 0);
}

// What the design dose asks for at the present flow, and how long a level lasts: said before the field is left.
function reckon(line) {
  if (!line.reckoned || !settings.feeding) return;
  let words = neededText(settings.feeding, line.site, line.parameter, flow);
  if (line.rules.shows && line.value.value.trim() !== "") {
    const said = found(line);
    const content = said.state === "read" ? contentOf(line.rules.shows, said, line.unit.value) : null;
    words = content ? lastsText(settings.feeding, line.site, content.amount, content.unit, flow) : "";
  }
  line.reckoned.textContent = words;
  line.reckoned.hidden = words === "";
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
  reckon(line);
  line.answers.replaceChildren(...answerBlock(line, said, why, {
    telephone: settings.telephone,
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
  showQueue(settings.works, { zone: settings.zone, again: async (entry) => { delete entry.refused; await drafts.keepEntry(entry); await flush(); } });
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
  if (who === null) return Promise.resolve();
  const kept = {};
  for (const line of lines) {
    if (!filled(line) && !line.note.value && !line.clock.value) continue;
    kept[line.key] = {
      value: line.value.value, unit: line.unit.value, notTaken: line.notTaken.value, clock: line.clock.value,
      note: line.note.value, atMs: line.atMs, confirmed: line.confirmed,
    };
  }
  return drafts.keepDraft({ key: draftKey(), lines: kept, note: note.value }).catch(notKept);
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

async function sendLines(chosen, kind, more = {}) {
  const unsure = chosen.filter((line) => hindrance(line) !== "");
  const ready = chosen.filter((line) => hindrance(line) === "");
  unsure.forEach(show);
  if (unsure.length && (more.close || ready.length === 0)) {
    unsure[0].value.focus();
    return;
  }
  if (who === null || (ready.length === 0 && !more.close && !more.take_over)) return;
  const entry = newEntry(kind, ready.map(sentLine), ready.map((line) => line.key), more);
  for (const line of ready) line.entry = entry.id;
  await drafts.keepEntry(entry).catch(notKept);
  await photos.bind(draftKey(), entry.keys, entry.id).catch(notKept);
  ready.forEach(show);
  showFoot();
  await flush();
}

function newEntry(kind, sent, keys, more = {}) {
  const body = { kind, lines: sent, person: who.person, made_at: new Date().toISOString(), clock_offset_s: Math.round(clock.offsetMs / 1000), ...more };
  if (who.spell) body.spell = who.spell;
  return { id: newId(), works: settings.works, person: who.person, name: who.name, shift: settings.shift, keys, body };
}

async function sendEntry(entry) {
  const answered = await send(`/w/${entry.works}/entries/`, entry, token(form));
  if (answered.body.now_ms) measured(answered.body.now_ms);
  if (answered.state === "unsent") {
    refused = answered.signedOut ? (answered.body.general || "sign in again to send; nothing is lost") : "";
    lines.filter((line) => line.entry === entry.id).forEach(show);
    showFoot();
    return false;
  }
  refused = "";
  if (answered.state === "taken") {
    await drafts.dropEntry(entry.id).catch(notKept);
    await takenBy(entry, answered.body);
  } else await refusedBy(entry, answered.body);
  showFoot();
  return true;
}

async function takenBy(entry, body) {
  const own = who !== null && entry.person === who.person;
  if (!own) await forget(entry);
  entry.body.lines.forEach((sent, place) => {
    const line = byKey.get(sent.key);
    const text = sent.value === "" ? `not taken, ${sent.not_taken}` : `${sent.value} ${sent.unit}`.trim();
    const ref = (body.refs ?? [])[place];
    const address = ref && !settings.tablet ? `/w/${settings.works}/reading/${ref}/` : "";
    if (!own) {
      if (line && entry.shift === settings.shift && entry.keys.includes(sent.key)) byOther(line, entry, text);
      return;
    }
    if (!line || !entry.keys.includes(sent.key)) {
      // From an earlier shift: it is in the book, and answers nothing that is due now.
      document.getElementById("news").append(doneLine(`${sent.site} ${sent.parameter} ${text}`, address));
      return;
    }
    line.inBook = true;
    line.sentIn = entry.id;
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
  if (entry.body.take_over) document.getElementById("taken-over").textContent = `Taken over by ${entry.name || entry.person}.`;
  if (entry.body.close && own) {
    await drafts.dropDraft(draftKey()).catch(notKept);
    reload = true;
  }
}

// What somebody else typed at this tablet is in the book: it must not come back as a draft.
async function forget(entry) {
  const key = [entry.works, entry.shift, entry.person].join("|");
  const draft = await drafts.draftOf(key).catch(() => null);
  if (!draft) return;
  for (const sent of entry.body.lines) if (draft.lines[sent.key]?.value.trim() === sent.value) delete draft.lines[sent.key];
  if (entry.body.close) draft.note = "";
  await drafts.keepDraft(draft).catch(notKept);
}

function byOther(line, entry, text) {
  line.inBook = true;
  line.item.classList.add("sent");
  line.item.querySelectorAll(".done").forEach((old) => old.remove());
  line.answers.after(doneLine(`${text}, ${entry.name || entry.person}`, ""));
}

// Refused and all its lines still here: back into the fields, marked. Otherwise it stays in the queue with the reason.
async function refusedBy(entry, body) {
  const here = who !== null && entry.person === who.person && entry.keys.length > 0 && entry.keys.every((key) => byKey.get(key)?.entry === entry.id);
  const reason = [body.general, ...Object.values(body.lines ?? {})].filter(Boolean).join("; ") || "not taken";
  if (!here) {
    await drafts.keepEntry({ ...entry, refused: reason }).catch(notKept);
    refused = "something was refused: see “On this device”";
    return;
  }
  await photos.unbind(entry.id).catch(notKept);
  await drafts.dropEntry(entry.id).catch(notKept);
  entry.keys.forEach((key, place) => {
    const line = byKey.get(key);
    line.entry = null;
    line.error = (body.lines ?? {})[place] ?? "";
    show(line);
  });
  refused = body.general || "not taken: see the lines marked";
  entry.keys.map((key) => byKey.get(key)).find((line) => line.error)?.value.focus();
}

let reload = false;
let again = false;

// Sends what waits, in the order in which it was made, one tab at a time, until something can't be sent now.
async function flush() {
  again = true;
  let sent = 0;
  const work = async () => {
    while (again) {
      again = false;
      // A browser that was killed may have lost the cookie that sending needs.
      if (!hasToken() && (await drafts.waiting().catch(() => [])).some(mine)) await refetch(settings.works);
      const entries = (await drafts.waiting().catch(() => [])).filter(mine).sort((a, b) => (a.body.made_at < b.body.made_at ? -1 : 1));
      for (const entry of entries) {
        if (entry.refused) continue;
        if (!(await sendEntry(entry))) break;
        sent += 1;
      }
      await photos.flush(settings.works, mine, form, (photo) => byKey.get(photo.key)?.photos.sent());
    }
  };
  if (navigator.locks) await navigator.locks.request("weirbook-outbox", { ifAvailable: true }, (lock) => (lock ? work() : null));
  else await work();
  const reached = (sent > 0 || settings.from_device) && (await refetch(settings.works));
  if (reached && settings.from_device) {
    settings.from_device = false;
    document.getElementById("offline").hidden = true;
  }
  showFoot();
  if (reload) location.reload();
}

// A shared tablet sends what anybody of the works entered on it; a person signed in, only what is theirs.
function mine(entry) {
  return entry.works === settings.works && (settings.tablet !== null || entry.person === settings.person);
}

// Puts back what this person has typed and not sent.
async function restore() {
  const kept = await drafts.draftOf(draftKey()).catch(() => null);
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
    if (entry.works !== settings.works || entry.person !== who.person || entry.shift !== settings.shift || entry.refused) continue;
    for (const key of entry.keys) if (byKey.has(key)) byKey.get(key).entry = entry.id;
  }
  lines.forEach(show);
  await Promise.all(lines.map((line) => line.photos.show()));
  showFoot();
  await offerOlder();
  form.dataset.ready = "yes";
}

// Another person takes the tablet: the fields are emptied, the draft stays under the name of whoever typed it.
async function leave() {
  await keep();
  delete form.dataset.ready;
  who = null;
  for (const line of lines) {
    for (const input of [line.value, line.notTaken, line.clock, line.note]) input.value = "";
    Object.assign(line, { atMs: null, confirmed: false, entry: null, error: "" });
    show(line);
    line.photos.show();
  }
  note.value = "";
  document.getElementById("news").replaceChildren();
}

async function enter(spell) {
  who = { person: spell.person, name: spell.name, spell: spell.spell };
  await restore();
  flush();
}

async function begin() {
  showClock();
  if (!settings.from_device) keepRound(asGiven, settings).catch(notKept);
  if (settings.tablet) await new Tablet(settings, form, { leave, enter, say: (words) => { refused = words; showFoot(); } }).begin();
  else await restore();
  document.documentElement.dataset.begun = "yes";
  await flush();
  await register();
  await sayDevice();
}

// What this person typed in an earlier shift and never sent: nothing typed is thrown away unseen.
async function offerOlder() {
  for (const old of await drafts.allDrafts().catch(() => [])) {
    const [works, shift, person] = old.key.split("|");
    const typed = Object.entries(old.lines).filter(([, line]) => line.value.trim() !== "" || line.notTaken !== "");
    if (works !== settings.works || person !== who.person || old.key === draftKey() || typed.length === 0) continue;
    document.getElementById("news").append(olderBlock(shift, typed.map(([key, line]) => `${key.replace(":", " ")} ${line.value || line.notTaken} ${line.value ? line.unit : ""}`.trim()), {
      send: async () => {
        const entry = newEntry("round", typed.map(([key, line]) => olderLine(key, line)), []);
        await drafts.keepEntry(entry).catch(notKept);
        await photos.bind(old.key, typed.map(([key]) => key), entry.id).catch(notKept);
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
  const pressed = event.submitter?.id;
  if (pressed === "take-over") {
    event.submitter.disabled = true;
    sendLines([], "round", { take_over: { starts_at: event.submitter.value } });
    return;
  }
  const chosen = lines.filter((line) => filled(line) && line.entry === null);
  const open = lines.filter((line) => !line.inBook && !filled(line)).map((line) => line.key);
  sendLines(chosen, "round", pressed === "close" ? { close: { note: note.value, open, starts_at: settings.starts_at } } : {});
});
note.addEventListener("input", keep);
document.getElementById("queue-send").addEventListener("click", flush);
document.getElementById("queue-save").addEventListener("click", () => saveQueue(settings.works));
window.addEventListener("online", flush);
window.addEventListener("pageshow", flush);
document.addEventListener("visibilitychange", () => { if (document.visibilityState === "visible") flush(); });
setInterval(flush, 30000);
begin();
