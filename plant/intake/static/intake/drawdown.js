// A feeder checked by draw-down: millilitres out of the cylinder over the seconds on the timer, put into the field as mL/min.

export function drawdownTimer(line, changed) {
  const place = document.createElement("div");
  place.className = "drawdown row";
  const cylinder = document.createElement("input");
  const id = `drawn-${line.number}`;
  Object.assign(cylinder, { id, inputMode: "decimal", autocomplete: "off", maxLength: 8 });
  const label = document.createElement("label");
  label.htmlFor = id;
  label.textContent = "Drawn, mL";
  const timer = document.createElement("button");
  timer.type = "button";
  timer.className = "button second";
  timer.textContent = "Start the timer";
  const shown = document.createElement("span");
  shown.className = "big";
  shown.setAttribute("role", "timer");
  let began = null;
  let seconds = 0;
  let ticking = 0;
  const put = () => {
    const drawn = Number(cylinder.value.trim().replace(",", "."));
    if (!(drawn > 0) || seconds < 1 || began !== null) return;
    line.value.value = ((drawn * 60) / seconds).toPrecision(3).replace(/\.?0+$/, (end) => (end.includes(".") ? "" : end));
    if (line.value.value.includes("e")) line.value.value = String(Math.round((drawn * 60) / seconds));
    line.note.value ||= `${drawn} mL in ${seconds.toFixed(0)} s`;
    changed(line, line.value);
  };
  timer.addEventListener("click", () => {
    if (began === null) {
      began = performance.now();
      ticking = setInterval(() => { shown.textContent = `${((performance.now() - began) / 1000).toFixed(0)} s`; }, 250);
      timer.textContent = "Stop";
      return;
    }
    seconds = (performance.now() - began) / 1000;
    began = null;
    clearInterval(ticking);
    shown.textContent = `${seconds.toFixed(1)} s`;
    timer.textContent = "Start again";
    put();
    cylinder.focus();
  });
  cylinder.addEventListener("input", put);
  place.append(label, cylinder, timer, shown);
  line.answers.before(place);
}
