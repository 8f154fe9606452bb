"use strict";
(() => {
  const data = JSON.parse(document.getElementById("numbers").textContent);
  const controls = document.getElementById("controls");
  if (!controls || !data.beds.length) return;
  const slider = document.getElementById("place");
  const where = document.getElementById("where");
  const today = document.getElementById("today");
  const switches = [...document.querySelectorAll("[data-switch]")];
  const places = data.beds.flatMap((bed, b) => bed.at.map((_, k) => [b, k]));
  const shown = (b) => switches[b].checked;
  let current = 0;

  const figures = data.charts.map((chart) => {
    const figure = document.querySelector(`[data-chart="${chart.key}"]`);
    return { chart, figure, svg: figure.querySelector("svg"), mark: figure.querySelector(".reading"),
      said: figure.querySelector("[data-said]") };
  });

  function nearestShown(index) {
    let best = -1;
    places.forEach(([b], i) => {
      if (shown(b) && (best < 0 || Math.abs(i - index) < Math.abs(best - index))) best = i;
    });
    return best;
  }

  function sayings(chart, b, k) {
    return chart.series.map((line) => {
      const was = today && today.checked && line.today.length ? ` (today ${line.today[b][k]})` : "";
      const name = chart.series.length > 1 ? `${line.name} ` : "";
      const number = line.now[b][k];
      return number === "-" ? `${name}-` : `${name}${number} ${line.unit}${was}`;
    }).join("\n");
  }

  function mark(one, b, k) {
    const line = one.mark.querySelector(".cursor");
    if (line) line.setAttribute("transform", `translate(${one.chart.series[0].x[b][k]} 0)`);
    one.mark.querySelectorAll(".spot").forEach((dot, s) => {
      const series = one.chart.series[s];
      dot.setAttribute("cx", series.x[b][k]);
      dot.setAttribute("cy", series.y[b][k]);
      dot.classList.toggle("off", series.y[b][k] < 0 || series.now[b][k] === "-");
    });
    one.mark.classList.remove("off");
  }

  function show(index) {
    const found = nearestShown(index);
    if (found < 0) {
      figures.forEach((one) => { one.mark.classList.add("off"); one.said.textContent = ""; });
      where.textContent = "no bed is shown";
      slider.setAttribute("aria-valuetext", "no bed is shown");
      return;
    }
    current = found;
    const [b, k] = places[found];
    const bed = data.beds[b];
    slider.value = String(found);
    where.textContent = `${bed.name}, ${bed.depth[k]} % of its depth, ${bed.at[k]} ${data.unit} from the inlet`;
    figures.forEach((one) => {
      one.said.textContent = sayings(one.chart, b, k);
      mark(one, b, k);
    });
    slider.setAttribute("aria-valuetext", `${where.textContent}: ${figures.map((one) => one.said.textContent).join("; ")}`);
  }

  function pointed(one, event) {
    const at = new DOMPoint(event.clientX, event.clientY).matrixTransform(one.svg.getScreenCTM().inverse());
    const first = one.chart.series[0];
    let best = -1;
    let least = Infinity;
    places.forEach(([b, k], i) => {
      if (!shown(b) || (!one.chart.upright && first.y[b][k] < 0)) return;
      const dx = first.x[b][k] - at.x;
      const dy = one.chart.upright ? 0 : first.y[b][k] - at.y;
      if (dx * dx + dy * dy < least) { least = dx * dx + dy * dy; best = i; }
    });
    if (best >= 0) show(best);
  }

  function step(direction) {
    let index = current + direction;
    while (index >= 0 && index < places.length && !shown(places[index][0])) index += direction;
    if (index >= 0 && index < places.length) show(index);
  }

  function bedStep(direction) {
    let b = places[current][0] + direction;
    while (b >= 0 && b < data.beds.length && !shown(b)) b += direction;
    if (b >= 0 && b < data.beds.length) show(places.findIndex(([other]) => other === b));
  }

  const keys = {
    ArrowRight: () => step(1), ArrowUp: () => step(1), ArrowLeft: () => step(-1), ArrowDown: () => step(-1),
    PageDown: () => bedStep(1), PageUp: () => bedStep(-1), Home: () => show(0), End: () => show(places.length - 1),
  };

  function pressed(event) {
    if (!(event.key in keys) || event.altKey || event.ctrlKey || event.metaKey) return;
    event.preventDefault();
    keys[event.key]();
  }

  function switchBed(box) {
    document.querySelectorAll(`[data-bed="${CSS.escape(box.dataset.switch)}"]`).forEach((part) => {
      part.classList.toggle("off", !box.checked);
    });
    show(current);
  }

  slider.max = String(places.length - 1);
  slider.addEventListener("input", () => show(Number(slider.value)));
  slider.addEventListener("keydown", pressed);
  figures.forEach((one) => {
    one.svg.addEventListener("pointermove", (event) => pointed(one, event));
    one.svg.addEventListener("pointerdown", (event) => { pointed(one, event); one.figure.focus({ preventScroll: true }); });
    one.figure.addEventListener("keydown", pressed);
    one.figure.tabIndex = 0;
  });
  switches.forEach((box) => box.addEventListener("change", () => switchBed(box)));
  if (today) {
    today.addEventListener("change", () => {
      document.querySelectorAll('[data-setting="today"]').forEach((part) => part.classList.toggle("off", !today.checked));
      show(current);
    });
  }
  window.addEventListener("beforeprint", () => document.querySelectorAll("details").forEach((part) => { part.open = true; }));
  controls.hidden = false;
  show(0);
})();
