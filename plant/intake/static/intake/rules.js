// The instant answer beside a field, decided from the same definition and by the same steps as plant/intake/rules.py.
// Numbers are exact fractions [numerator, denominator] of BigInt, so that a value on a limit is judged as the server does.

const TYPED = /^[ \t\u00a0]*([<>]?)[ \t\u00a0]*([+\-\u2212]?)([0-9]*)([.,]?)([0-9]*)[ \t\u00a0]*$/;
const BLANKS = /^[ \t\u00a0]+|[ \t\u00a0]+$/g;
const LONGEST = 30;

export function answer(definition, typed, unit, atS = 0) {
  if (typed.replace(BLANKS, "") === "") return made("empty");
  const read = parse(typed, definition.commas);
  const scale = Object.hasOwn(definition.units, unit) ? definition.units[unit] : null;
  if (read === null || scale === null) return made("stopped");
  const value = add(times(fraction(read.plain), fraction(scale.scale)), fraction(scale.offset));
  const rules = definition.as[scale.as];
  return made("read", read.plain, read.qualifier, doubtOf(rules, value, read, atS), ...limitOf(rules, value, read.qualifier));
}

export function parse(typed, commas) {
  const found = TYPED.exec(typed);
  if (found === null || [...typed.replace(BLANKS, "")].length > LONGEST) return null;
  const [, qualifier, sign, whole, mark, part] = found;
  if ((whole === "" && part === "") || (mark === "," && !commas)) return null;
  const minus = sign === "-" || sign === "\u2212" ? "-" : "";
  return { plain: minus + (whole || "0") + (part ? "." + part : ""), qualifier, pointed: mark !== "" };
}

function made(state, plain = "", qualifier = "", doubt = "", limit = "", side = "") {
  return { state, plain, qualifier, doubt, limit, side };
}

function doubtOf(rules, value, read, atS) {
  if (outside(value, rules.possible)) return "impossible";
  if (read.qualifier) return "";
  if (!read.pointed && lostPoint(value, rules.lost)) return "lost_point";
  const counted = counterOf(value, rules.counter, atS);
  if (counted) return counted;
  return outside(value, rules.usual) ? "unusual" : "";
}

function outside(value, [low, high]) {
  return (low !== null && compare(value, fraction(low)) < 0) || (high !== null && compare(value, fraction(high)) > 0);
}

function lostPoint(value, series) {
  if (series === null) return false;
  const low = fraction(series[0]);
  const high = fraction(series[1]);
  if (high[0] <= 0n || compare(value, times([5n, 1n], high)) <= 0) return false;
  return [10n, 100n, 1000n].some((step) => {
    const part = times(value, [1n, step]);
    return compare(times([4n, 5n], low), part) <= 0 && compare(part, times([5n, 4n], high)) <= 0;
  });
}

function counterOf(value, counter, atS) {
  if (counter === null || atS <= counter.at_s) return "";
  const last = fraction(counter.last);
  let passed = add(value, times([-1n, 1n], last));
  if (passed[0] < 0n) {
    if (counter.modulo === null || counter.most_per_hour === null) return "lower";
    passed = add(passed, fraction(counter.modulo));
  }
  if (counter.most_per_hour === null) return "";
  const most = times(fraction(counter.most_per_hour), [BigInt(atS - counter.at_s), 1n]);
  if (compare(times(passed, [3600n, 1n]), most) > 0) return compare(value, last) < 0 ? "lower" : "faster";
  return "";
}

function limitOf(rules, value, qualifier) {
  for (const limit of rules.limits) {
    const seen = limit.digits === null ? value : rounded(value, limit.digits);
    if (limit.low !== null && qualifier !== ">") {
      const side = compare(seen, fraction(limit.low));
      if (side < 0 || (qualifier === "<" && side === 0)) return [limit.code, "low"];
    }
    if (limit.high !== null && qualifier !== "<") {
      const side = compare(seen, fraction(limit.high));
      if (side > 0 || (qualifier === ">" && side === 0)) return [limit.code, "high"];
    }
  }
  return ["", ""];
}

// Half up, away from zero.
function rounded(value, digits) {
  const power = 10n ** BigInt(digits);
  const size = value[0] < 0n ? -value[0] : value[0];
  const whole = (2n * size * power + value[1]) / (2n * value[1]);
  return [value[0] < 0n ? -whole : whole, power];
}

// "-12.50", "1e-3" or "5/9" as an exact fraction.
function fraction(text) {
  const slash = text.indexOf("/");
  if (slash >= 0) return [BigInt(text.slice(0, slash)), BigInt(text.slice(slash + 1))];
  const [digits, exponent = "0"] = text.toLowerCase().split("e");
  const [whole, part = ""] = digits.split(".");
  const power = Number(exponent) - part.length;
  const value = BigInt(whole + part);
  return power >= 0 ? [value * 10n ** BigInt(power), 1n] : [value, 10n ** BigInt(-power)];
}

function times(a, b) {
  return [a[0] * b[0], a[1] * b[1]];
}

function add(a, b) {
  return [a[0] * b[1] + b[0] * a[1], a[1] * b[1]];
}

function compare(a, b) {
  const left = a[0] * b[1];
  const right = b[0] * a[1];
  return left < right ? -1 : left > right ? 1 : 0;
}
