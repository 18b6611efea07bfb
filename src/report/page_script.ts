/**
 * What lets a reader of the page look at values: zoom by dragging, by the two fields or by + and -, and read a channel with
 * the pointer or the arrow keys. Plain JavaScript for the browser; the page reads without it.
 */
export const PAGE_SCRIPT = `"use strict";
(() => {
  const id = (name) => document.getElementById(name);
  const { energiesEv: x, counts, expected } = JSON.parse(id("data").textContent);
  const svg = id("plot"), from = id("from"), to = id("to"), readout = id("readout");
  const W = 720, H = 300, L = 60, R = 10, T = 10, B = 40;
  const last = x.length - 1;
  let low = x[0], high = x[last], channel = 0, start = null;
  const make = (name, attributes, text) => {
    const node = document.createElementNS("http://www.w3.org/2000/svg", name);
    for (const key in attributes) node.setAttribute(key, attributes[key]);
    if (text !== undefined) node.textContent = text;
    svg.append(node);
    return node;
  };
  const px = (e) => L + (W - L - R) * (e - low) / (high - low);
  const step = (span) => {
    const power = 10 ** Math.floor(Math.log10(span / 5));
    return [1, 2, 5, 10].map((m) => m * power).find((s) => span / s <= 8);
  };
  const ticks = (a, b) => {
    const s = step(b - a), list = [];
    for (let k = Math.ceil(a / s); k * s <= b; k++) list.push(Number((k * s).toPrecision(12)));
    return list;
  };
  const nearest = (e) => {
    let best = 0;
    for (let i = 1; i <= last; i++) if (Math.abs(x[i] - e) < Math.abs(x[best] - e)) best = i;
    return best;
  };
  let cursor;
  const read = () => {
    cursor.setAttribute("x1", px(x[channel]));
    cursor.setAttribute("x2", px(x[channel]));
    readout.textContent = Number(x[channel].toFixed(6)) + " eV: " + counts[channel] + " counts" +
      (expected ? ", expected " + expected[channel].toPrecision(6) : "");
  };
  const draw = () => {
    svg.replaceChildren();
    const shown = [];
    for (let i = 0; i <= last; i++) if (x[i] >= low && x[i] <= high) shown.push(i);
    let top = 1;
    for (const i of shown) top = Math.max(top, counts[i], expected ? expected[i] : 0);
    const py = (n) => H - B - (H - T - B) * Math.sqrt(Math.max(0, n) / top);
    const ink = "#222222";
    make("rect", { x: L, y: T, width: W - L - R, height: H - T - B, fill: "none", stroke: ink });
    for (const e of ticks(low, high)) {
      make("line", { x1: px(e), x2: px(e), y1: H - B, y2: H - B + 5, stroke: ink });
      make("text", { x: px(e), y: H - B + 18, "text-anchor": "middle" }, e);
    }
    let above = Infinity;
    for (const n of ticks(0, top).reverse()) {
      if (n < 0 || above !== Infinity && py(n) - above < 14) continue;
      above = py(n);
      make("line", { x1: L - 5, x2: L, y1: py(n), y2: py(n), stroke: ink });
      make("text", { x: L - 8, y: py(n) + 4, "text-anchor": "end" }, n);
    }
    make("text", { x: (L + W - R) / 2, y: H - 5, "text-anchor": "middle" }, id("data").dataset.axis);
    const path = (list) => "M" + shown.map((i) => px(x[i]).toFixed(1) + "," + py(list[i]).toFixed(1)).join("L");
    if (shown.length > 0) {
      if (expected) make("path", { d: path(expected), fill: "none", stroke: "#56B4E9", "stroke-width": 3 });
      if (shown.length < 300) for (const i of shown) make("circle", { cx: px(x[i]), cy: py(counts[i]), r: 1.8 });
      else make("path", { d: path(counts), fill: "none", stroke: ink, "stroke-width": 0.8 });
    }
    cursor = make("line", { y1: T, y2: H - B, stroke: "#D55E00", "stroke-dasharray": "4 3" });
    read();
  };
  const zoom = (a, b) => {
    if (!(b > a)) return;
    low = Math.max(x[0], a);
    high = Math.min(x[last], b);
    if (!(high > low)) [low, high] = [x[0], x[last]];
    from.value = Number(low.toFixed(4));
    to.value = Number(high.toFixed(4));
    channel = Math.min(Math.max(channel, nearest(low)), nearest(high));
    draw();
  };
  const energyAt = (event) => {
    const box = svg.getBoundingClientRect();
    return low + (high - low) * ((event.clientX - box.left) * W / box.width - L) / (W - L - R);
  };
  svg.addEventListener("pointerdown", (event) => { start = energyAt(event); });
  svg.addEventListener("pointerup", (event) => {
    const end = energyAt(event);
    if (start !== null && Math.abs(end - start) > (high - low) / 50) zoom(Math.min(start, end), Math.max(start, end));
    start = null;
  });
  svg.addEventListener("pointermove", (event) => { channel = nearest(energyAt(event)); read(); });
  svg.addEventListener("keydown", (event) => {
    const move = { ArrowLeft: -1, ArrowRight: 1 }[event.key], factor = { "+": 0.5, "-": 2 }[event.key];
    if (move) {
      channel = Math.min(last, Math.max(0, channel + move));
      const shift = x[channel] < low ? x[channel] - low : x[channel] > high ? x[channel] - high : 0;
      if (shift) zoom(low + shift, high + shift);
      else read();
    } else if (factor) zoom(x[channel] - factor * (high - low) / 2, x[channel] + factor * (high - low) / 2);
    else return;
    event.preventDefault();
  });
  for (const field of [from, to]) field.addEventListener("change", () => zoom(Number(from.value), Number(to.value)));
  id("all").addEventListener("click", () => zoom(x[0], x[last]));
  id("explore").hidden = false;
  zoom(low, high);
})();`;
