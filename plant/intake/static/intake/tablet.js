// A tablet that several people share: a name, a PIN that only the server can check, and a lock after idleness.
// Without a network the name is claimed; the PIN given later, in the same spell, confirms it.

import * as drafts from "./drafts.js";
import { newId, put, token } from "./sending.js";

const LOOK_EVERY_MS = 5000;

export class Tablet {
  constructor(settings, form, act) {
    this.works = settings.works;
    this.hands = settings.tablet.hands;
    this.name = settings.tablet.name;
    this.idleMs = settings.tablet.idle_s * 1000;
    this.form = form;
    this.act = act;
    this.panel = document.getElementById("hand");
    this.work = document.getElementById("work");
    this.who = document.getElementById("who");
    this.spell = null;
    for (const kind of ["pointerdown", "keydown", "input"]) document.addEventListener(kind, () => this.touched(), { passive: true });
    setInterval(() => this.look(), LOOK_EVERY_MS);
    document.addEventListener("visibilitychange", () => this.look());
  }

  // Whoever had the tablet a moment ago still has it, after a reload or a crash too.
  async begin() {
    const kept = await drafts.spellOf(this.works).catch(() => null);
    if (kept && Date.now() - kept.active_ms < this.idleMs && this.hands.some((hand) => hand.person === kept.person)) await this.take(kept);
    else await this.lock();
  }

  touched() {
    if (!this.spell) return;
    this.spell.active_ms = Date.now();
    if (this.spell.active_ms - (this.keptMs ?? 0) > LOOK_EVERY_MS) this.remember();
  }

  remember() {
    this.keptMs = Date.now();
    drafts.keepSpell({ works: this.works, ...this.spell }).catch(() => {});
  }

  look() {
    if (this.spell && Date.now() - this.spell.active_ms >= this.idleMs) this.lock("Locked after a while without use. What was typed is kept.");
  }

  async lock(why = "") {
    await this.act.leave();
    this.spell = null;
    this.who.textContent = "";
    await drafts.dropSpell(this.works).catch(() => {});
    this.work.hidden = true;
    this.panel.hidden = false;
    this.askName(why);
  }

  async take(spell) {
    this.spell = { person: spell.person, name: spell.name, spell: spell.spell, attested: spell.attested, active_ms: Date.now() };
    this.remember();
    this.panel.hidden = true;
    this.work.hidden = false;
    this.sayWho();
    await this.act.enter(this.spell);
  }

  sayWho() {
    const words = this.spell.attested === "pin" ? "name and PIN" : "name chosen, PIN owed";
    this.who.className = "taken-by";
    const said = document.createElement("span");
    said.textContent = `${this.spell.name}: ${words}`;
    this.who.replaceChildren(said);
    if (this.spell.attested !== "pin") this.who.append(button("Give the PIN", "button second small", () => this.askPin(this.spell, "", true)));
    this.who.append(button("Lock", "button second small", () => this.lock()));
  }

  askName(why) {
    const names = document.createElement("div");
    names.className = "names";
    names.append(...this.hands.map((hand) => button(hand.name, "button second", () => this.askPin({ person: hand.person, name: hand.name, spell: newId(), attested: "claimed" }, "", false))));
    this.panel.replaceChildren(title("Who has this tablet?"), ...(why ? [text("quiet", why)] : []), ...(this.hands.length ? [names] : [text("", "Nobody enters readings here yet: a supervisor states who does.")]), text("quiet small", this.name));
    names.querySelector("button")?.focus();
  }

  askPin(hand, why, owed) {
    this.panel.hidden = false;
    this.work.hidden = !owed;
    const form = document.createElement("form");
    form.className = "form";
    const field = document.createElement("div");
    field.className = "field";
    const label = document.createElement("label");
    label.htmlFor = "pin";
    label.textContent = "PIN";
    const input = document.createElement("input");
    Object.assign(input, { id: "pin", type: "password", inputMode: "numeric", autocomplete: "off", maxLength: 8, required: true, className: "pin" });
    field.append(label, input);
    const said = text(why ? "answer error" : "quiet small", why || "Checked by the server only.");
    said.setAttribute("role", "status");
    const row = document.createElement("div");
    row.className = "row";
    const go = button("Go on", "button", () => {});
    go.type = "submit";
    row.append(go);
    if (owed) row.append(button("Not now", "button second", () => { this.panel.hidden = true; }));
    else row.append(button("Go on by name only", "button second", () => this.take(hand)), button("Another name", "button second", () => this.askName("")));
    form.append(field, said, row);
    form.addEventListener("submit", async (event) => {
      event.preventDefault();
      go.disabled = true;
      await this.prove(hand, input.value, owed);
      go.disabled = false;
    });
    this.panel.replaceChildren(title(hand.name), form);
    input.focus();
  }

  async prove(hand, pin, owed) {
    const response = await put(`/w/${this.works}/spells/${hand.spell}`, { person: hand.person, pin }, token(this.form));
    if (response?.ok) {
      if (!owed) return this.take({ ...hand, attested: "pin" });
      this.spell.attested = "pin";
      this.remember();
      this.panel.hidden = true;
      this.sayWho();
      return null;
    }
    const body = response ? await response.json().catch(() => ({})) : {};
    const unreachable = response === null || response.status >= 500;
    if (!owed && (unreachable || body.owed)) {
      await this.take(hand);
      return this.act.say(unreachable ? "No network: the name is taken as chosen, the PIN is owed. Entry goes on." : body.general);
    }
    return this.askPin(hand, unreachable ? "No network: the PIN can't be checked now. Entry goes on." : (body.general ?? "Not taken."), owed);
  }
}

function title(words) {
  const out = document.createElement("h2");
  out.id = "hand-title";
  out.textContent = words;
  return out;
}

function text(style, words) {
  const out = document.createElement("p");
  if (style) out.className = style;
  out.textContent = words;
  return out;
}

function button(words, style, act) {
  const out = document.createElement("button");
  out.type = "button";
  out.className = style;
  out.textContent = words;
  out.addEventListener("click", act);
  return out;
}
