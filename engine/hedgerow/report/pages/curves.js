// Charts over time: growth with exits and idle stretches, drawdown, sources of money, volatility.

const EXITS = ["cut", "stop", "assigned", "gone"];
const curves = { dates: [], lines: [], yardstick: null };
let sweep = null; // sessions swept over: [first, last]

async function readCurves(data) {
  curves.dates = await column(data.curves.dates);
  const each = await Promise.all(data.curves.variants.map((one) => column(one.equity)));
  curves.lines = data.curves.variants.map((one, at) => ({ name: one.name, code: at, idle: one.idle, values: each[at] }));
  if (data.curves.yardstick)
    curves.yardstick = { name: data.yardstick_name, code: -1, idle: [], values: await column(data.curves.yardstick) };
}

const drawn = () => [...(curves.yardstick && !state.hidden.has(-1) ? [curves.yardstick] : []), ...curves.lines.filter((one) => !state.hidden.has(one.code))];

function keys(figure) {
  const all = [...curves.lines, ...(curves.yardstick ? [curves.yardstick] : [])];
  const toggle = (code) => { if (!state.hidden.delete(code)) state.hidden.add(code); tell("hidden"); };
  figure.querySelector(".controls").replaceChildren(...all.map((one) =>
    make("button", { type: "button", class: "key", "aria-pressed": !state.hidden.has(one.code), onclick: () => toggle(one.code) },
      swatch(one.code), one.name)));
}

function sessionAt(day) {
  let low = 0, high = curves.dates.length - 1;
  while (low < high) { const middle = (low + high) >> 1; if (curves.dates[middle] < day) low = middle + 1; else high = middle; }
  return low;
}

// One chart over the sessions: `values` of each line, `scale(lowest, highest, bottom, top)`, how values are said.
function overTime(id, spec) {
  const figure = chart(id, ["hidden", "chosen"], (host, whole) => {
    const lines = drawn().map((one) => ({ ...one, shown: spec.values(one) }));
    if (!lines.length || curves.dates.length < 2) return emptied(host, "Nothing is drawn: choose a variant above.");
    const wide = host.clientWidth >= 720, strip = spec.strip ? Math.min(curves.lines.length, 8) * 9 + 8 : 0;
    const margin = { left: 52, right: wide ? 138 : 10, top: 12, bottom: 28 + strip };
    const frame = new Frame(host, (wide ? spec.height : spec.height * 0.85) + strip, margin, `${whole.querySelector("h3").textContent}: ${spec.told(lines)}`);
    const days = curves.dates, x = linear(days[0], days[days.length - 1], frame.left, frame.right), xs = days.map(x);
    let low = Infinity, high = -Infinity;
    for (const one of lines) for (const value of one.shown) { if (value < low) low = value; if (value > high) high = value; }
    const y = spec.scale(low, high, frame.bottom, frame.top);
    frame.ticksUp(y, spec.ticks(low, high), spec.axis);
    frame.bottom += strip;
    frame.years(x, days[0], days[days.length - 1]);
    frame.bottom -= strip;
    if (spec.base !== undefined) frame.add("line", { x1: frame.left, x2: frame.right, y1: y(spec.base), y2: y(spec.base), class: "zero" });
    heldBands(frame, x);
    const thin = lines.length > 12 ? " thin" : "";
    for (const one of lines) frame.line(xs, one.shown.map(y), `${hue(one.code)}${one.code < 0 ? " dashed" : dash(one.code)}${thin}`);
    if (wide) frame.endNames(outermost(lines).map((one) => ({ name: one.name, y: y(one.shown[one.shown.length - 1]) })));
    if (spec.strip) stripBelow(frame, x, xs);
    if (spec.dots) chosenDots(frame, x, y, lines);
    timeReading(frame, whole, x, xs, (session) => sayAt(whole, session, lines, spec.say));
  });
  keys(figure);
  on("hidden", () => keys(figure));
}

// The lines whose ends are named: all of a few, of many the highest and the lowest.
function outermost(lines) {
  if (lines.length <= 14) return lines;
  const last = (one) => one.shown[one.shown.length - 1], sorted = [...lines].sort((a, b) => last(b) - last(a));
  return [...sorted.slice(0, 7), ...sorted.slice(-7)];
}

function sayAt(figure, session, lines, say) {
  const parts = [dateText(curves.dates[session])];
  for (const one of lines.slice(0, 12)) parts.push(swatch(one.code), `${one.name} ${say(one.shown[session])}`);
  readout(figure, ...parts);
}

function heldBands(frame, x) {
  const t = state.trades, last = curves.dates[curves.dates.length - 1];
  if (state.chosen.size > 60) return;
  for (const at of state.chosen) {
    const from = x(t.opened[at]), to = x(Number.isFinite(t.closed[at]) ? t.closed[at] : last);
    frame.add("rect", { x: from, width: Math.max(to - from, 1.5), y: frame.top, height: frame.bottom - frame.top, class: "held" });
  }
}

function chosenDots(frame, x, y, lines) {
  const t = state.trades, places = new Map(lines.map((one) => [one.name, one]));
  let left = 500;
  for (const at of state.chosen) {
    const one = places.get(t.variant.words[t.variant.codes[at]]);
    const day = Number.isFinite(t.closed[at]) ? t.closed[at] : curves.dates[curves.dates.length - 1];
    if (!one || day < curves.dates[0] || day > curves.dates[curves.dates.length - 1] || (left -= 1) < 0) continue;
    frame.add("circle", { cx: x(day), cy: y(one.shown[sessionAt(day)]), r: 3.5, class: "mark-trade", "data-trade": at });
  }
}

function stripBelow(frame, x, xs) {
  const t = state.trades, leaving = t.outcome.words.map((word) => EXITS.includes(word));
  curves.lines.slice(0, 8).forEach((one, row) => {
    const top = frame.bottom + 7 + row * 9, code = t.variant.words.indexOf(one.name);
    for (const [first, last] of one.idle)
      frame.add("rect", { x: xs[first], width: Math.max(xs[last] - xs[first], 1), y: top, height: 7, class: `idle ${hue(one.code)}` });
    const pixels = new Set();
    for (let at = 0; at < state.count; at += 1)
      if (t.variant.codes[at] === code && leaving[t.outcome.codes[at]] && t.closed[at] >= curves.dates[0]) pixels.add(Math.round(x(t.closed[at]) * 2) / 2);
    const path = [...pixels].map((place) => `M${place},${top}v7`).join("");
    frame.add("path", { d: path, class: `exit ${hue(one.code)}` }, draw("title", {}, `${one.name}: exits before the end`));
  });
}

function timeReading(frame, figure, x, xs, say) {
  const line = frame.add("line", { class: "cursor", y1: frame.top, y2: frame.bottom, visibility: "hidden" });
  const swept = frame.add("rect", { class: "brush", y: frame.top, height: frame.bottom - frame.top, width: 0 });
  const show = () => {
    if (state.cursor === null) return;
    line.setAttribute("visibility", "visible");
    line.setAttribute("x1", xs[state.cursor]);
    line.setAttribute("x2", xs[state.cursor]);
    say(state.cursor);
    if (sweep) {
      const [from, to] = [...sweep].sort((a, b) => a - b);
      swept.setAttribute("x", xs[from]);
      swept.setAttribute("width", xs[to] - xs[from]);
    }
  };
  figure.showCursor = show;
  const nearest = (event) => {
    const box = frame.svg.getBoundingClientRect(), place = ((event.clientX - box.left) / box.width) * frame.width;
    const days = curves.dates, share = (place - frame.left) / (frame.right - frame.left);
    return sessionAt(days[0] + Math.min(Math.max(share, 0), 1) * (days[days.length - 1] - days[0]));
  };
  const move = (session, sweeping) => {
    sweep = sweeping ? [sweep ? sweep[0] : state.cursor ?? session, session] : null;
    state.cursor = session;
    tell("cursor");
  };
  frame.svg.addEventListener("pointermove", (event) => move(nearest(event), event.buttons === 1));
  frame.svg.addEventListener("pointerup", () => chooseSwept());
  frame.svg.setAttribute("tabindex", "0");
  frame.svg.setAttribute("role", "group");
  frame.svg.setAttribute("aria-roledescription", "chart, arrow keys read its values");
  frame.svg.addEventListener("keydown", (event) => {
    const step = { ArrowRight: 1, ArrowLeft: -1, ArrowUp: 21, ArrowDown: -21, PageUp: 252, PageDown: -252, Home: -1e9, End: 1e9 }[event.key];
    if (event.key === "Enter") { chooseSwept(); event.preventDefault(); }
    if (step === undefined) return;
    event.preventDefault();
    move(Math.min(Math.max((state.cursor ?? -1) + step, 0), curves.dates.length - 1), event.shiftKey);
  });
  frame.svg.addEventListener("keyup", (event) => { if (event.key === "Shift") chooseSwept(); });
}

function chooseSwept() {
  if (!sweep || sweep[0] === sweep[1]) { sweep = null; return; }
  const [from, to] = sweep.map((session) => curves.dates[session]).sort((a, b) => a - b);
  sweep = null;
  chooseFromChart({ from, to }, `ended ${dateText(from)} to ${dateText(to)}`);
}

function drawCurves() {
  overTime("growth", {
    height: 380, strip: true, dots: true, base: 1,
    values: (one) => one.values.map((value) => (value > 0 ? value / one.values[0] : NaN)),
    scale: (low, high, from, to) => logarithmic(Math.min(low * 0.98, 0.99), Math.max(high * 1.02, 1.01), from, to),
    ticks: (low, high) => logTicks(Math.min(low * 0.98, 0.99), Math.max(high * 1.02, 1.01), 6),
    axis: (tick) => `${number(tick, tick % 1 ? 2 : 0).replace(/(\.\d)0$/, "$1")}×`,
    say: (value) => `${number(value, 3)}×`,
    told: (lines) => lines.map((one) => `${one.name} ${number(one.shown[one.shown.length - 1])} times its start`).join(", "),
  });
  overTime("drawdown", {
    height: 240, base: 0,
    values: (one) => { let peak = -Infinity; return one.values.map((value) => { peak = Math.max(peak, value); return value / peak - 1; }); },
    scale: (low, high, from, to) => linear(Math.min(low * 1.03, -0.01), 0, from, to),
    ticks: (low) => niceTicks(Math.min(low * 1.03, -0.01), 0, 5),
    axis: (tick) => percent(tick, 0),
    say: (value) => percent(value, 1),
    told: (lines) => lines.map((one) => `${one.name} at most ${percent(Math.min(...one.shown), 1)}`).join(", "),
  });
  on("cursor", () => { for (const id of ["growth", "drawdown"]) if (byId(id).showCursor) byId(id).showCursor(); });
}

const SOURCES = ["stock", "calls", "puts", "options", "dividends", "interest", "costs"];

async function drawSources(data) {
  const names = Object.keys(data.months);
  const read = await Promise.all(Object.values(data.months).map(async (one) => ({ months: await column(one.months), parts: await columns(one.parts) })));
  let chosen = 0;
  const figure = chart("sources", ["sources"], (host, whole) => {
    const { months, parts } = read[chosen], wide = host.clientWidth >= 720;
    if (!months.length) return emptied(host, "No month to show.");
    const lines = SOURCES.map((name, code) => ({ name, code })).filter((one) => parts[one.name])
      .map((one) => { let sum = 0; return { ...one, shown: [...parts[one.name]].map((value) => (sum += value)) }; });
    const total = { name: "all together", code: -1, shown: [...months].map((_, at) => lines.reduce((sum, one) => sum + one.shown[at], 0)) };
    const all = [...lines, total], values = all.flatMap((one) => one.shown);
    const low = Math.min(0, ...values), high = Math.max(0, ...values);
    const frame = new Frame(host, 300, { left: 78, right: wide ? 112 : 10, top: 12, bottom: 28 }, `Where the money of ${names[chosen]} came from: ${all.map((one) => `${one.name} ${number(one.shown[one.shown.length - 1], 0)}`).join(", ")}`);
    const days = [...months].map((month) => Date.UTC(1970, month + 1, 0) / 86400000);
    const x = linear(days[0], days[days.length - 1], frame.left, frame.right), y = linear(low, high, frame.bottom, frame.top);
    frame.ticksUp(y, niceTicks(low, high, 6), (tick) => number(tick, 0));
    frame.years(x, days[0], days[days.length - 1]);
    frame.add("line", { x1: frame.left, x2: frame.right, y1: y(0), y2: y(0), class: "zero" });
    for (const one of all) frame.line(days.map(x), one.shown.map(y), `${hue(one.code)}${one.code < 0 ? " dashed" : ""}`);
    if (wide) frame.endNames(all.map((one) => ({ name: one.name, y: y(one.shown[one.shown.length - 1]) })));
    const say = (at) => readout(whole, `to ${monthText(months[at])}`, ...all.flatMap((one) => [swatch(one.code), `${one.name} ${number(one.shown[at], 0, true)}`]));
    frame.svg.addEventListener("pointermove", (event) => {
      const box = frame.svg.getBoundingClientRect(), place = ((event.clientX - box.left) / box.width) * frame.width;
      say(Math.min(Math.max(Math.round(((place - frame.left) / (frame.right - frame.left)) * (days.length - 1)), 0), days.length - 1));
    });
    walkable(frame.svg, days.length, say, () => {});
    say(days.length - 1);
  });
  if (names.length > 1) figure.querySelector(".controls").append(choice("Variant", names, 0, (at) => { chosen = at; tell("sources"); }));
}

async function drawVolatility(data) {
  const read = await columns(data.volatility);
  chart("volatility", [], (host, whole) => {
    if (read.dates.length < 2) return emptied(host, "No volatility was known on these days.");
    const days = read.dates, high = Math.max(...read.assumed_high, ...[...read.realized].filter(Number.isFinite));
    const frame = new Frame(host, 300, { left: 48, right: 10, top: 12, bottom: 28 }, "Assumed and realized volatility over time");
    const x = linear(days[0], days[days.length - 1], frame.left, frame.right), y = linear(0, high, frame.bottom, frame.top), xs = days.map(x);
    frame.ticksUp(y, niceTicks(0, high, 5), (tick) => percent(tick, 0));
    frame.years(x, days[0], days[days.length - 1]);
    frame.band(xs, read.assumed_low.map(y), read.assumed_high.map(y), "c-0");
    frame.line(xs, read.realized.map(y), "c-1");
    frame.line(xs, read.assumed.map(y), "c-0");
    const say = (at) => readout(whole, `${dateText(days[at])} a year`, swatch(0), `assumed ${percent(read.assumed[at])}`, swatch(1), `came true ${percent(read.realized[at])}`);
    walkable(frame.svg, days.length, say, () => {});
    frame.svg.addEventListener("pointermove", (event) => {
      const box = frame.svg.getBoundingClientRect(), share = ((event.clientX - box.left) / box.width * frame.width - frame.left) / (frame.right - frame.left);
      say(Math.min(Math.max(Math.round(share * (days.length - 1)), 0), days.length - 1));
    });
    say(days.length - 1);
  });
}
