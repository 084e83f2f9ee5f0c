// What a level or a weight amounts to, and the difference to last time; by the table the server made from the vessel's shape.

const number = new Intl.NumberFormat("en-GB", { maximumFractionDigits: 0 });

export function amountText(shows, said, unit) {
  if (shows === null || said.qualifier) return "";
  const value = Number(said.plain);
  if (shows.kind === "weight") {
    if (unit !== "kg") return "";
    return withChange(`net ${number.format(value - shows.tare_kg)} kg`, shows.last === null ? null : value - shows.last, "kg");
  }
  const litres = unit === "L" ? value : litresAt(shows, metres(value, unit, shows.top_m));
  if (litres === null) return "";
  const last = shows.last === null ? null : litresAt(shows, shows.last);
  return withChange(`${number.format(litres)} L`, last === null ? null : litres - last, "L");
}

function metres(value, unit, top) {
  return unit === "cm" ? value / 100 : unit === "%" ? (value / 100) * top : value;
}

function litresAt(shows, level) {
  const table = shows.table;
  if (!(level >= table[0][0]) || level > table.at(-1)[0]) return null;
  const upper = table.findIndex(([mark]) => mark >= level);
  if (upper <= 0) return table[0][1];
  const [[low, lowL], [high, highL]] = [table[upper - 1], table[upper]];
  return lowL + ((level - low) / (high - low)) * (highL - lowL);
}

function withChange(text, change, unit) {
  if (change === null || Math.abs(change) < 0.5) return text;
  return `${text}, ${number.format(Math.abs(change))} ${unit} ${change < 0 ? "less" : "more"} than last time`;
}

// What is in it, {amount, unit}: litres of a level, net kilograms of a weight; null where that can't be said.
export function contentOf(shows, said, unit) {
  if (shows === null || said.qualifier) return null;
  const value = Number(said.plain);
  if (shows.kind === "weight") return unit === "kg" ? { amount: value - shows.tare_kg, unit: "kg" } : null;
  const litres = unit === "L" ? value : litresAt(shows, metres(value, unit, shows.top_m));
  return litres === null ? null : { amount: litres, unit: "L" };
}
