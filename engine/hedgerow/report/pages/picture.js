// A trade's own picture: the stock's path, gain and legs by day, what could be won and lost, what happened.

let pictures = null; // { size, variants, first_chunk, chunks } and the number of the first trade of each variant
let legs = null;
const unpacked = new Map();

async function readPictures(data) {
  pictures = data.pictures;
  legs = await columns(data.legs);
  legs.first = new Map();
  for (let row = legs.trade.length - 1; row >= 0; row -= 1) legs.first.set(legs.trade[row], row);
  pictures.first_trade = [];
  let before = -1;
  for (let at = 0; at < state.count; at += 1) {
    const code = state.trades.variant.codes[at];
    if (code !== before) { pictures.first_trade[code] = at; before = code; }
  }
}

async function partsOf(trade) {
  const code = state.trades.variant.codes[trade], name = state.trades.variant.words[code];
  const place = trade - pictures.first_trade[code], variant = state.names.indexOf(name);
  const number_ = pictures.first_chunk[variant] + Math.floor(place / pictures.size), inside = place % pictures.size;
  if (!unpacked.has(number_)) {
    const chunk = pictures.chunks[number_];
    const [marks, events, mark, event] = await Promise.all([column(chunk.marks), column(chunk.events), columns(chunk.mark), columns(chunk.event)]);
    unpacked.set(number_, { marks, events, mark, event });
  }
  const chunk = unpacked.get(number_), meaning = pictures.variants[name];
  const story = { ...slices(chunk.event, chunk.events, inside), meaning, symbol: state.trades.symbol.words[state.trades.symbol.codes[trade]], position: state.trades.position[trade] };
  return { marks: slices(chunk.mark, chunk.marks, inside), names: meaning.legs.map(([leg]) => leg), story: tellStory(story), legs: legsOf(trade) };
}

// The part of each column that belongs to one position of a chunk.
function slices(table, counts, inside) {
  const start = counts.subarray(0, inside).reduce((sum, one) => sum + one, 0), end = start + counts[inside];
  return Object.fromEntries(Object.entries(table).map(([name, values]) => [name, values.subarray(start, end)]));
}

function legsOf(trade) {
  const found = [];
  for (let row = legs.first.get(trade) ?? legs.trade.length; row < legs.trade.length && legs.trade[row] === trade; row += 1) {
    const word = (name) => legs[name].words[legs[name].codes[row]];
    found.push({ leg: word("leg"), side: word("side"), right: word("right"), ended: word("ended"), strike: legs.strike[row], expiry: legs.expiry[row], opened: legs.opened[row], closed: legs.closed[row], quantity: legs.quantity[row], price: legs.price_in[row], out: legs.price_out[row], pnl: legs.pnl[row] });
  }
  return found;
}

async function openTrade(place) {
  const trade = state.shown[place];
  if (trade === undefined) return;
  const dialog = byId("picture"), t = state.trades, word = (name) => t[name].words[t[name].codes[trade]];
  const parts = await partsOf(trade), step = (by) => { moveTo(ledger.active + by); openTrade(ledger.active); };
  const facts = [
    ["Result", number(t.pnl[trade], 2, true)], ["of what it tied up", percent(t.return_on_debit[trade], 2, true)], ["Outcome", word("outcome")],
    ["What ended it", word("reason")], ["Held", counted(t.sessions[trade], "session", "sessions")], ["Shares at entry", number(t.shares[trade], 0)], ["Net debit", number(t.net_debit[trade], 2)],
    ["Best gain", number(t.best_gain[trade], 2)], ["Worst loss", number(-t.worst_loss[trade], 2)], ["Break-even", number(t.break_even[trade], 2)], ["Odds of best gain", percent(t.odds_of_best[trade], 0)],
    ["Stock", number(t.stock_pnl[trade], 2, true)], ["Options", number(t.option_pnl[trade], 2, true)], ["Dividends", number(t.dividends[trade], 2)], ["Costs", number(-t.costs[trade], 2)],
  ];
  const plots = ["Stock and strikes", "Gain and legs, day by day", "At the first expiry, as it stood at entry"].map((title) => {
    const host = make("div", { class: "plot" });
    return { figure: make("figure", { class: "chart" }, make("figcaption", {}, make("h3", {}, title)), make("p", { class: "how" }), host), host };
  });
  const button = (label, act) => make("button", { type: "button", onclick: act }, label);
  dialog.replaceChildren(
    make("header", {}, make("h2", { id: "picture-title" }, `${word("symbol")}, ${dateText(t.opened[trade])} to ${Number.isFinite(t.closed[trade]) ? dateText(t.closed[trade]) : "open"}${state.names.length > 1 ? `, ${word("variant")}` : ""}`),
      button("Before", () => step(-1)), button("After", () => step(1)), button("Close", () => dialog.close())),
    make("dl", { class: "facts" }, ...facts.map(([name, value]) => make("div", {}, make("dt", {}, name), make("dd", {}, value)))),
    make("div", { class: "pictures" }, ...plots.map((one) => one.figure),
      make("section", {}, make("h3", {}, "What happened"), make("ol", {}, ...parts.story.map((line) => make("li", {}, line))))));
  dialog.dataset.trade = trade;
  dialog.setAttribute("aria-labelledby", "picture-title");
  if (!dialog.open) dialog.showModal();
  drawPath(plots[0], trade, parts);
  drawGain(plots[1], trade, parts);
  drawPayoff(plots[2], trade, parts);
}

function dayFrame(host, parts, trade, values, height, told, right = 112) {
  const days = [...parts.marks.day];
  const ends = [...parts.legs.map((one) => one.expiry), state.trades.closed[trade], ...days].filter(Number.isFinite);
  const first = Math.min(state.trades.opened[trade], ...days), last = Math.min(Math.max(...ends), days.length ? Math.max(...days) + 45 : Infinity);
  const frame = new Frame(host, height, { left: 64, right, top: 16, bottom: 28 }, told);
  const known = values.filter(Number.isFinite), low = Math.min(...known), high = Math.max(...known), pad = (high - low) * 0.08 || Math.abs(high) * 0.02 || 1;
  const x = linear(first, Math.max(last, first + 1), frame.left, frame.right), y = linear(low - pad, high + pad, frame.bottom, frame.top);
  const ticks = niceTicks(low - pad, high + pad, 5), places = ticks.some((tick) => Math.abs(tick % 1) > 1e-9) ? (high - low < 0.5 ? 2 : 1) : 0;
  frame.ticksUp(y, ticks, (tick) => number(tick, places));
  const wanted = niceTicks(first, last, frame.narrow ? 2 : 3).map(Math.round).filter((day) => day >= first && day <= last);
  frame.ticksAcross(x, wanted, dateText);
  return { frame, x, y, days };
}

function drawPath({ figure, host }, trade, parts) {
  const t = state.trades, strikes = parts.legs.filter((one) => Number.isFinite(one.strike));
  const spots = [...parts.marks.spot], values = [...spots, ...strikes.map((one) => one.strike), t.stock_in[trade], t.stock_out[trade]];
  if (!values.some(Number.isFinite)) return emptied(host, "No day was marked.");
  const { frame, x, y, days } = dayFrame(host, parts, trade, values, 260, "The stock's price and the strikes");
  const names = [];
  strikes.forEach((one) => {
    const code = one.right === "call" ? 1 : 2, to = Math.min(x(one.expiry), frame.right);
    frame.add("line", { x1: x(one.opened), x2: Number.isFinite(to) ? to : frame.right, y1: y(one.strike), y2: y(one.strike), class: `whisker ${hue(code)}` });
    if (Number.isFinite(one.expiry) && x(one.expiry) <= frame.right + 1) frame.add("line", { x1: to, x2: to, y1: y(one.strike) - 6, y2: y(one.strike) + 6, class: `whisker ${hue(code)}` });
    names.push({ name: `${one.side} ${one.right} ${number(one.strike, 2).replace(/\.00$/, "")}`, y: y(one.strike) });
  });
  const left = Number.isFinite(t.closed[trade]) && Number.isFinite(t.stock_out[trade]) && !(t.closed[trade] < days[days.length - 1]);
  frame.line([...days, ...(left ? [t.closed[trade]] : [])].map(x), [...spots, ...(left ? [t.stock_out[trade]] : [])].map(y), "c-0");
  if (Number.isFinite(t.stock_in[trade])) frame.add("circle", { cx: x(t.opened[trade]), cy: y(t.stock_in[trade]), r: 4.5, class: "dot c-0" });
  if (left) frame.add("circle", { cx: x(t.closed[trade]), cy: y(t.stock_out[trade]), r: 4.5, class: "ring c-0" });
  frame.endNames(names.slice(-8));
  figure.querySelector(".how").textContent = "The line is the close; strikes run to their expiry. The dot is the entry, the ring the way out of the shares.";
}

function drawGain({ figure, host }, trade, parts) {
  const t = state.trades, gain = [...parts.marks.gain];
  if (!gain.length) return emptied(host, "No day was marked: the position was opened and closed within one session.");
  const fields = parts.names.map((name, at) => ({ name, code: at + 1, values: [...(parts.marks[`leg${at}`] || [])] })).filter((one) => one.values.some((value) => value !== 0));
  const bounds = [t.best_gain[trade], -t.worst_loss[trade]].filter(Number.isFinite), over = Number.isFinite(t.closed[trade]), all = [0, ...gain, over ? t.pnl[trade] : 0, ...fields.flatMap((one) => one.values), ...bounds];
  const { frame, x, y, days } = dayFrame(host, parts, trade, all, 260, `Gain by day, at the end ${number(t.pnl[trade], 2, true)}`);
  const xs = days.map(x), names = [{ name: "gain", y: y(over ? t.pnl[trade] : gain[gain.length - 1]) }];
  frame.add("line", { x1: frame.left, x2: frame.right, y1: y(0), y2: y(0), class: "zero" });
  for (const [bound, word] of [[t.best_gain[trade], "best gain"], [-t.worst_loss[trade], "worst loss"]]) {
    if (!Number.isFinite(bound)) continue;
    frame.add("line", { x1: frame.left, x2: frame.right, y1: y(bound), y2: y(bound), class: "mean" });
    names.push({ name: word, y: y(bound) });
  }
  for (const one of fields) { frame.line(xs, one.values.map(y), `${hue(one.code)} dashed`); names.push({ name: one.name, y: y(one.values[one.values.length - 1]) }); }
  frame.line(over ? [...xs, x(t.closed[trade])] : xs, (over ? [...gain, t.pnl[trade]] : gain).map(y), "c-0");
  if (over) frame.add("circle", { cx: x(t.closed[trade]), cy: y(t.pnl[trade]), r: 4.5, class: "ring c-0" });
  frame.endNames(names);
  figure.querySelector(".how").textContent = "Money at the model's middle price, before the costs of leaving: the whole position's gain, and what each leg was worth. The ring is what was left at the end, costs counted.";
}

// What the position as opened would bring at its first expiry; a later leg counts as if that were its last day.
function drawPayoff({ figure, host }, trade, parts) {
  const t = state.trades, opened = t.opened[trade], first = parts.legs.filter((one) => one.opened === opened);
  const start = Number.isFinite(t.stock_in[trade]) ? t.stock_in[trade] : parts.marks.spot[0];
  if (!Number.isFinite(start)) return emptied(host, "The stock's price at entry is not known.");
  const strikes = first.map((one) => one.strike), low = Math.min(start, ...strikes) * 0.9, high = Math.max(start, ...strikes) * 1.1;
  const worth = (price) => t.shares[trade] * price - t.net_debit[trade]
    + first.reduce((sum, one) => sum + one.quantity * Math.max(one.right === "call" ? price - one.strike : one.strike - price, 0), 0);
  const prices = [...new Set([low, ...strikes, start, high])].sort((a, b) => a - b), gains = prices.map(worth);
  const least = Math.min(0, ...gains), most = Math.max(0, ...gains), pad = (most - least) * 0.08 || 1;
  const frame = new Frame(host, 260, { left: 64, right: 14, top: 16, bottom: 42 }, `Gain at the first expiry by the stock's price: ${gains.map((one, at) => `${number(prices[at], 2)}: ${number(one, 0, true)}`).join(", ")}`);
  const x = linear(low, high, frame.left, frame.right), y = linear(least - pad, most + pad, frame.bottom, frame.top);
  frame.ticksUp(y, niceTicks(least - pad, most + pad, 5), (tick) => number(tick, 0));
  frame.ticksAcross(x, niceTicks(low, high, 5), (tick) => number(tick, high - low < 5 ? 1 : 0));
  frame.text((frame.left + frame.right) / 2, frame.height - 4, "the stock's price at the first expiry", "middle");
  frame.add("line", { x1: frame.left, x2: frame.right, y1: y(0), y2: y(0), class: "zero" });
  frame.add("line", { x1: x(start), x2: x(start), y1: frame.top, y2: frame.bottom, class: "mean" });
  frame.text(x(start) + 5, frame.top + 6, "at entry");
  frame.line(prices.map(x), gains.map(y), "c-0");
  const later = new Set(first.map((one) => one.expiry)).size > 1;
  figure.querySelector(".how").textContent = `Before costs and dividends.${later ? " Legs of a later expiry count as if that day were their last." : ""}`;
}
