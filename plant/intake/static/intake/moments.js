// Times of day on the works' own clock, whatever zone the tablet believes in.

const formats = new Map();

function format(zone) {
  if (!formats.has(zone)) {
    formats.set(zone, new Intl.DateTimeFormat("en-GB", { timeZone: zone, hour: "2-digit", minute: "2-digit", hourCycle: "h23" }));
  }
  return formats.get(zone);
}

// "07:05" of an instant in milliseconds.
export function clockText(ms, zone) {
  return format(zone).format(new Date(ms));
}

// The latest instant, not more than ten minutes ahead, at which the works' clock showed "07:05".
export function instantOf(clock, zone, nowMs) {
  const latest = Math.floor((nowMs + 600000) / 60000) * 60000;
  const [hour, minute] = clock.split(":").map(Number);
  const [lateHour, lateMinute] = clockText(latest, zone).split(":").map(Number);
  const back = (((lateHour * 60 + lateMinute - hour * 60 - minute) % 1440) + 1440) % 1440;
  // A change of the clocks in between moves it by up to an hour either way.
  for (const shift of [0, 60, -60, 30, -30]) {
    const tried = latest - (back + shift) * 60000;
    if (tried <= latest && clockText(tried, zone) === clock) return tried;
  }
  return latest - back * 60000;
}
