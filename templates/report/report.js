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
  for (const box of document.querySelectorAll("[data-plot]")) {
    const plot = JSON.parse(box.dataset.plot);
    const svg = box.querySelector("svg");
    const mark = made("g", { visibility: "hidden" });
    const upright = made("line", { y1: plot.top, y2: plot.bottom, class: "s-quiet", stroke: "#59616c", "stroke-width": 0.8 });
    const dot = made("circle", { r: 3.5, class: "f-curve", fill: "#23457a" });
    mark.append(upright, dot);
    svg.append(mark);
    const slider = document.createElement("input");
    slider.type = "range";
    slider.min = 0;
    slider.max = plot.time.length - 1;
    slider.value = 0;
    slider.setAttribute("aria-label", `Read ${plot.signal} along the time`);
    const output = document.createElement("output");
    const reading = document.createElement("p");
    reading.className = "reading";
    reading.append(slider, output);
    box.after(reading);
    const x = (t) => plot.left + (t - plot.low[0]) / (plot.high[0] - plot.low[0]) * (plot.right - plot.left);
    const y = (v) => plot.bottom - (v - plot.low[1]) / (plot.high[1] - plot.low[1]) * (plot.bottom - plot.top);
    const show = (k) => {
      const time = plot.time[k], value = plot.value[k];
      upright.setAttribute("x1", x(time));
      upright.setAttribute("x2", x(time));
      dot.setAttribute("cx", x(time));
      dot.setAttribute("cy", y(value));
      mark.setAttribute("visibility", "visible");
      const text = `t = ${time} s, ${plot.signal} = ${value} ${plot.unit}`;
      output.textContent = text;
      slider.setAttribute("aria-valuetext", text);
    };
    slider.addEventListener("input", () => show(+slider.value));
    svg.addEventListener("pointermove", (event) => {
      const here = svg.getBoundingClientRect();
      const across = (event.clientX - here.left) / here.width * svg.viewBox.baseVal.width;
      const time = plot.low[0] + (across - plot.left) / (plot.right - plot.left) * (plot.high[0] - plot.low[0]);
      let nearest = 0;
      plot.time.forEach((t, k) => { if (Math.abs(t - time) < Math.abs(plot.time[nearest] - time)) nearest = k; });
      slider.value = nearest;
      show(nearest);
    });
  }
})();
