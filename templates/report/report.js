"use strict";
(() => {
  // The filter of the compliance matrix.
  const form = document.getElementById("filter");
  const rows = [...document.querySelectorAll("tbody.requirement")];
  const count = document.getElementById("shown");
  const checked = (name) => [...form.querySelectorAll(`input[name=${name}]:checked`)].map((box) => box.value);
  const apply = () => {
    const verdicts = checked("verdict"), standings = checked("standing");
    const loop = form.loop.value, owner = form.owner.value;
    let shown = 0;
    for (const row of rows) {
      const fits = verdicts.includes(row.dataset.verdict) && standings.includes(row.dataset.standing)
        && (!loop || row.dataset.loops.split(" ").includes(loop)) && (!owner || row.dataset.owner === owner);
      row.hidden = !fits;
      shown += fits;
      for (const audit of document.querySelectorAll(`[data-of="${CSS.escape(row.id)}"]`)) audit.hidden = !fits;
    }
    for (const group of document.querySelectorAll("tbody.group")) {
      let next = group.nextElementSibling, any = false;
      for (; next && next.matches(".requirement"); next = next.nextElementSibling) any ||= !next.hidden;
      group.hidden = !any;
    }
    count.textContent = `${shown} of ${rows.length} requirements shown`;
  };
  if (form) {
    form.hidden = false;
    form.addEventListener("input", apply);
    form.addEventListener("reset", () => setTimeout(apply));
    form.addEventListener("submit", (event) => event.preventDefault());
    apply();
  }

  // The reading of a plot: pointer on the picture, keyboard on the slider under it.
  const SVG = "http://www.w3.org/2000/svg";
  const made = (name, attributes) => {
    const element = document.createElementNS(SVG, name);
    for (const [key, value] of Object.entries(attributes)) element.setAttribute(key, value);
    return element;
  };
  const placed = (axis, value) => {
    const scale = axis.log ? Math.log : (number) => number;
    const share = (scale(value) - scale(axis.low)) / (scale(axis.high) - scale(axis.low));
    return axis.start + share * (axis.end - axis.start);
  };
  for (const box of document.querySelectorAll("[data-plot]")) {
    const plot = JSON.parse(box.dataset.plot);
    const { across, curves } = plot;
    const svg = box.querySelector("svg");
    const mark = made("g", { visibility: "hidden" });
    const ends = curves.flatMap((curve) => [curve.start, curve.end]);
    const upright = made("line", {
      y1: Math.min(...ends), y2: Math.max(...ends), class: "s-quiet", stroke: "#59616c", "stroke-width": 0.8,
    });
    const dots = curves.map(() => made("circle", { r: 3.5, class: "f-curve", fill: "#23457a" }));
    mark.append(upright, ...dots);
    svg.append(mark);
    const slider = document.createElement("input");
    slider.type = "range";
    slider.min = 0;
    slider.max = across.values.length - 1;
    slider.value = 0;
    slider.setAttribute("aria-label", `Read ${plot.what}`);
    const output = document.createElement("output");
    const reading = document.createElement("p");
    reading.className = "reading";
    reading.append(slider, output);
    box.after(reading);
    const places = across.values.map((value) => placed(across, value));
    const show = (k) => {
      upright.setAttribute("x1", places[k]);
      upright.setAttribute("x2", places[k]);
      curves.forEach((curve, number) => {
        const inside = curve.values[k] >= curve.low && curve.values[k] <= curve.high;
        dots[number].setAttribute("visibility", inside ? "inherit" : "hidden");
        dots[number].setAttribute("cx", places[k]);
        dots[number].setAttribute("cy", placed(curve, curve.values[k]));
      });
      mark.setAttribute("visibility", "visible");
      const text = [across, ...curves].map((axis) => `${axis.name} = ${axis.values[k]} ${axis.unit}`.trim()).join(", ");
      output.textContent = text;
      slider.setAttribute("aria-valuetext", text);
    };
    slider.addEventListener("input", () => show(+slider.value));
    svg.addEventListener("pointermove", (event) => {
      const here = svg.getBoundingClientRect();
      const at = (event.clientX - here.left) / here.width * svg.viewBox.baseVal.width;
      let nearest = 0;
      places.forEach((place, k) => { if (Math.abs(place - at) < Math.abs(places[nearest] - at)) nearest = k; });
      slider.value = nearest;
      show(nearest);
    });
  }
})();
