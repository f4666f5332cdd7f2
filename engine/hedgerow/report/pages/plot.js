// A frame to draw in: scales, axes, lines; reading by pointer and by arrow keys.

const linear = (low, high, from, to) => (value) => from + ((value - low) / (high - low || 1)) * (to - from);
const logarithmic = (low, high, from, to) => {
  const scale = linear(Math.log(low), Math.log(high), from, to);
  return (value) => scale(Math.log(value));
};

function niceTicks(low, high, wanted) {
  const rough = (high - low) / Math.max(wanted, 1) || 1, power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 2.5, 5, 10].map((one) => one * power).find((one) => one >= rough * 0.999);
  const ticks = [];
  for (let at = Math.ceil(low / step - 1e-9); at * step <= high + step * 1e-9; at += 1) ticks.push(at * step);
  return ticks;
}

function logTicks(low, high, wanted) {
  if (high / low < 4) return niceTicks(low, high, wanted).filter((tick) => tick > 0);
  const ticks = [], span = high / low, every = span > 300 ? [1] : span > 30 ? [1, 2, 5] : [1, 1.5, 2, 3, 5, 7];
  for (let power = Math.floor(Math.log10(low)); power <= Math.log10(high); power += 1)
    for (const one of every) if (one * 10 ** power >= low && one * 10 ** power <= high) ticks.push(one * 10 ** power);
  return ticks;
}

function yearTicks(first, last, wanted) {
  const start = new Date(first * 86400000).getUTCFullYear(), end = new Date(last * 86400000).getUTCFullYear();
  const every = [1, 2, 5, 10, 20].find((one) => (end - start) / one <= wanted) || 20, ticks = [];
  for (let year = start; year <= end + 1; year += 1) {
    const day = Date.UTC(year, 0, 1) / 86400000;
    if (day >= first && day <= last && year % every === 0) ticks.push([day, String(year)]);
  }
  if (ticks.length > 1) return ticks;
  return niceTicks(first, last, 4).map((day) => [Math.round(day), dateText(Math.round(day))]);
}

class Frame {
  constructor(host, height, margin, label) {
    this.width = Math.max(Math.round(host.clientWidth), 260);
    this.height = height;
    this.narrow = this.width < 560;
    this.left = margin.left;
    this.right = this.width - margin.right;
    this.top = margin.top;
    this.bottom = height - margin.bottom;
    this.svg = draw("svg", { viewBox: `0 0 ${this.width} ${height}`, role: "img", "aria-label": label });
    host.replaceChildren(this.svg);
  }

  add(name, attributes, ...children) {
    const node = draw(name, attributes, ...children);
    this.svg.append(node);
    return node;
  }

  text(x, y, words, kind = "") { return this.add("text", { x, y, class: kind }, words); }

  ticksUp(scale, ticks, say) {
    for (const tick of ticks) {
      const y = scale(tick);
      this.add("line", { x1: this.left, x2: this.right, y1: y, y2: y, class: "grid" });
      this.text(this.left - 8, y + 4, say(tick), "end");
    }
  }

  ticksAcross(scale, ticks, say) {
    for (const tick of ticks) {
      const x = scale(tick);
      this.add("line", { x1: x, x2: x, y1: this.bottom, y2: this.bottom + 4, class: "grid" });
      this.text(x, this.bottom + 18, say(tick), "middle");
    }
  }

  years(scale, first, last) {
    const ticks = yearTicks(first, last, (this.right - this.left) / 55);
    this.ticksAcross(scale, ticks.map(([day]) => day), (day) => ticks.find(([one]) => one === day)[1]);
  }

  // A line through points, thinned to what a pixel can show: first, lowest, highest and last of each column.
  line(xs, ys, kind) {
    let path = "", at = 0, pen = "M";
    const put = (one) => { path += `${pen}${xs[one].toFixed(1)},${ys[one].toFixed(1)}`; pen = "L"; };
    while (at < xs.length) {
      if (!Number.isFinite(ys[at])) { pen = "M"; at += 1; continue; }
      let end = at, low = at, high = at;
      while (end + 1 < xs.length && Number.isFinite(ys[end + 1]) && Math.floor(xs[end + 1]) === Math.floor(xs[at])) {
        end += 1;
        if (ys[end] < ys[low]) low = end;
        if (ys[end] > ys[high]) high = end;
      }
      for (const one of [...new Set([at, Math.min(low, high), Math.max(low, high), end])]) put(one);
      at = end + 1;
    }
    return this.add("path", { d: path, class: `line ${kind}` });
  }

  band(xs, lows, highs, kind) {
    const up = [...xs].map((x, at) => `${x.toFixed(1)},${highs[at].toFixed(1)}`);
    const down = [...xs].map((x, at) => `${x.toFixed(1)},${lows[at].toFixed(1)}`).reverse();
    return this.add("path", { d: `M${up.join("L")}L${down.join("L")}Z`, class: `area ${kind}` });
  }

  // Names at the right ends of lines, moved apart where they would touch.
  endNames(ends) {
    const sorted = ends.filter((one) => Number.isFinite(one.y)).sort((a, b) => a.y - b.y);
    let last = this.top - 8;
    for (const one of sorted) { one.at = Math.max(one.y + 4, last + 14); last = one.at; }
    let limit = this.bottom + 4;
    for (const one of [...sorted].reverse()) { one.at = Math.min(one.at, limit); limit = one.at - 14; }
    for (const one of sorted) this.text(this.right + 8, one.at, shortened(one.name, 17), "strong");
  }
}

const shortened = (text, most) => (text.length > most ? `${text.slice(0, most - 1)}…` : text);

// A chart redrawn when its width changes and when any of `events` is told. `paint(host)` gives its frame.
function chart(id, events, paint) {
  const figure = byId(id), host = figure.querySelector(".plot");
  let width = 0;
  const again = () => { const kept = document.activeElement === host.firstElementChild; paint(host, figure); if (kept) host.firstElementChild.focus(); };
  new ResizeObserver(() => {
    if (Math.abs(host.clientWidth - width) > 1) { width = host.clientWidth; again(); }
  }).observe(host);
  for (const event of events) on(event, () => { if (width) again(); });
  return figure;
}

function readout(figure, ...parts) { figure.querySelector(".readout").replaceChildren(...parts); }

// Places of a chart that are walked through by arrow keys: `say` tells one, `act` chooses it.
function walkable(svg, count, say, act, mark) {
  let at = -1;
  svg.setAttribute("tabindex", "0");
  svg.setAttribute("role", "group");
  svg.setAttribute("aria-roledescription", "chart, arrow keys read its values");
  svg.addEventListener("keydown", (event) => {
    const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1, PageUp: -10, PageDown: 10, Home: -count, End: count }[event.key];
    if (step !== undefined) at = Math.min(Math.max((at < 0 && step > 0 ? -1 : at) + step, 0), count - 1);
    else if ((event.key === "Enter" || event.key === " ") && at >= 0) act(at);
    else return;
    event.preventDefault();
    if (step !== undefined) { say(at); if (mark) mark(at); }
  });
}

function emptied(host, words) { host.replaceChildren(make("p", { class: "empty" }, words)); }
