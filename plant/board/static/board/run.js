// A cursor that reads the values of a run: by touch or mouse on the picture, by arrow keys on the slider under it.
const SVG = "http://www.w3.org/2000/svg";

for (const figure of document.querySelectorAll("[data-run]")) {
  const pictures = [...figure.querySelectorAll("svg[data-cursor]")].map((svg) => ({
    svg,
    stops: JSON.parse(svg.dataset.cursor),
    line: added(svg, "line", { class: "s-edge", "stroke-dasharray": "2 3", visibility: "hidden" }),
    dot: added(svg, "circle", { r: "5", class: "f-card s-water", "stroke-width": "2.5", visibility: "hidden" }),
  }));
  if (!pictures.length || !pictures[0].stops.length) continue;
  const count = pictures[0].stops.length;

  const readout = document.createElement("p");
  readout.className = "cursor-readout";
  const slider = document.createElement("input");
  slider.type = "range";
  slider.min = "0";
  slider.max = String(count - 1);
  slider.value = String(count - 1);
  slider.setAttribute("aria-label", "Read the values along the run");
  slider.className = "no-print";
  figure.querySelector("figcaption").before(readout, slider);

  const show = (index) => {
    slider.value = String(index);
    slider.setAttribute("aria-valuetext", pictures[0].stops[index][2]);
    readout.textContent = pictures[0].stops[index][2];
    for (const { svg, stops, line, dot } of pictures) {
      const [x, y] = stops[index];
      const height = svg.viewBox.baseVal.height;
      for (const [name, value] of Object.entries({ x1: x, x2: x, y1: 20, y2: height - 54, visibility: "visible" })) {
        line.setAttribute(name, value);
      }
      dot.setAttribute("cx", x);
      dot.setAttribute("cy", y ?? 0);
      dot.setAttribute("visibility", y === null ? "hidden" : "visible");
    }
  };

  slider.addEventListener("input", () => show(Number(slider.value)));
  for (const { svg, stops } of pictures) {
    svg.addEventListener("pointermove", (event) => {
      const box = svg.getBoundingClientRect();
      const x = ((event.clientX - box.left) / box.width) * svg.viewBox.baseVal.width;
      let best = 0;
      stops.forEach((stop, index) => {
        if (Math.abs(stop[0] - x) < Math.abs(stops[best][0] - x)) best = index;
      });
      show(best);
    });
  }
  show(count - 1);
}

function added(svg, name, attributes) {
  const node = document.createElementNS(SVG, name);
  for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, value);
  svg.append(node);
  return node;
}
