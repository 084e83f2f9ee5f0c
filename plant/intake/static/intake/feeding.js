// What a level lasts for and what the design dose asks of a feeder, at the flow that has just been read or else the last known.

const whole = new Intl.NumberFormat("en-GB", { maximumFractionDigits: 0 });
const fine = new Intl.NumberFormat("en-GB", { maximumSignificantDigits: 2 });

// {m3_h, fresh} of a meter: from the totaliser typed in this round, else from its two newest readings; null where unknown.
export function flowOf(feeding, meter, line, typed, atMs) {
  const known = feeding.meters[meter];
  if (!known) return null;
  const counter = line?.rules.as.kept.counter;
  if (counter && typed?.state === "read" && typed.qualifier === "") {
    const hours = (atMs / 1000 - counter.at_s) / 3600;
    const passed = Number(typed.plain) - Number(counter.last);
    if (hours >= 0.5 && passed > 0) return { m3_h: (passed * known.to_m3) / hours, fresh: true };
  }
  return known.flow_m3_h ? { m3_h: known.flow_m3_h, fresh: false } : null;
}

// Words under a level or weight: how long it lasts at the design dose. `flow` gives the flow of a meter.
export function lastsText(feeding, site, content, unit, flow) {
  const heel = feeding.heels[site];
  if (!heel || content === null) return "";
  let perHour = 0;
  for (const point of Object.values(feeding.points)) {
    if (!point.vessels.includes(site)) continue;
    const known = flow(point.meter);
    const perM3 = unit === "kg" ? point.kg_per_m3 : point.l_per_m3;
    if (known === null || perM3 === null) return "";
    // Several tanks that feed one point share its draw.
    perHour += (perM3 * known.m3_h) / point.vessels.length;
  }
  if (perHour <= 0) return "";
  const hours = Math.max(0, (content - (unit === "kg" ? heel.kg : heel.L)) / perHour);
  const lasts = hours < 96 ? `${whole.format(hours)} h` : `${whole.format(hours / 24)} days`;
  return `lasts about ${lasts} at the design dose`;
}

export function neededText(feeding, site, parameter, flow) {
  const point = feeding.points[site];
  if (!point || point.l_per_m3 === null) return "";
  const known = flow(point.meter);
  if (known === null) return "";
  const mlMin = (point.l_per_m3 * known.m3_h * 1000) / 60;
  const at = `at ${whole.format(known.m3_h)} m³/h${known.fresh ? "" : " (last known)"}`;
  if (parameter === "drawdown") return `The design dose ${point.design_mg_l} mg/L ${at} needs ${fine.format(mlMin)} mL/min.`;
  if (parameter !== "feeder_setting") return "";
  if (!point.ml_min_per_pct) return `The design dose ${point.design_mg_l} mg/L ${at} needs ${fine.format(mlMin)} mL/min; no draw-down says which setting that is.`;
  return `The design dose ${point.design_mg_l} mg/L ${at}: about ${fine.format(mlMin / point.ml_min_per_pct)} %, by the last draw-down. The operator in charge decides.`;
}
