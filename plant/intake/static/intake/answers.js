// What stands under a field: one sentence, what is so and what to do next.

const LOUD = new Set(["action", "regulatory"]);

export function answerBlock(line, said, why, act) {
  const out = [];
  const texts = line.rules.texts;
  if (why === "refused") out.push(paragraph("answer error", line.error));
  if (why === "both") out.push(paragraph("answer error", "A value and a reason for having none: keep one of them."));
  if (why === "stopped") out.push(paragraph("answer error", texts.stopped));
  if (said?.state !== "read") return out;
  const limit = said.limit ? line.rules.as.kept.limits.find((item) => item.code === said.limit) : null;
  if (said.doubt) {
    out.push(paragraph("answer doubt", line.confirmed ? "Looked at twice: the instrument shows this." : texts[said.doubt]));
    if (!line.confirmed) out.push(buttons(["The instrument shows this", "button", act.confirm], ["Read again", "button second", act.again]));
  }
  if (limit) {
    const block = document.createElement("div");
    block.className = `note ${limit.level}`;
    block.append(paragraph("strong", limit.says), paragraph("", limit.do[said.side]));
    if (limit.caution) block.append(paragraph("", limit.caution));
    if (limit.call) block.append(paragraph("", `Tell: ${limit.call}.`));
    if (LOUD.has(limit.level)) {
      const waiting = line.entry !== null;
      block.append(paragraph("strong", waiting
        ? `Not sent: telephone ${[act.telephone, limit.call].filter(Boolean).join("; ") || "the person in charge"}.`
        : "Not sent yet. Send it now."));
    }
    out.push(block);
  }
  if (line.entry !== null) out.push(paragraph("quiet", "Waiting to be sent; kept on this device."));
  else if (why === "" && limit && LOUD.has(limit.level)) out.push(buttons(["Send this now", "button", act.sendNow]));
  return out;
}

export function doneLine(text, address) {
  const line = paragraph("done small settled", `In the book: ${text}`);
  if (address) {
    const link = document.createElement("a");
    link.href = address;
    link.textContent = "look or correct";
    line.append(" · ", link);
  }
  return line;
}

export function olderBlock(shift, texts, act) {
  const block = document.createElement("section");
  block.className = "note alert stack";
  block.append(paragraph("strong", `Typed in the shift ${shift} and never sent`), paragraph("", texts.join("; ")));
  const done = (work) => async () => { await work(); block.remove(); };
  block.append(buttons(["Send these now", "button", done(act.send)], ["Throw them away", "button second", done(act.drop)]));
  return block;
}

function paragraph(style, text) {
  const out = document.createElement("p");
  if (style) out.className = style;
  out.textContent = text;
  return out;
}

function buttons(...wanted) {
  const row = document.createElement("div");
  row.className = "actions";
  for (const [text, style, act] of wanted) {
    const button = document.createElement("button");
    button.type = "button";
    button.className = style;
    button.textContent = text;
    button.addEventListener("click", act);
    row.append(button);
  }
  return row;
}
