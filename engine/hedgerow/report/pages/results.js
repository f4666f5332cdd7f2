// How positions ended: results on what they tied up, and outcomes as counts and as money.

const BINS = 41;

// Trades drawn by the charts of results: those of the variants that are not hidden.
function ofVariant(code) {
  const kept = [];
  for (let at = 0; at < state.count; at += 1) if (code < 0 || state.trades.variant.codes[at] === code) kept.push(at);
  return kept;
}

function binned(trades) {
  const values = trades.map((at) => state.trades.return_on_debit[at]).filter(Number.isFinite).sort((a, b) => a - b);
  if (!values.length) return null;
  const edge = Math.max(Math.abs(values[Math.floor(values.length * 0.005)]), Math.abs(values[Math.ceil(values.length * 0.995) - 1]), 0.001);
  const rough = (2 * edge) / BINS, power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 2.5, 5, 10].map((one) => one * power).find((one) => one >= rough);
  const half = Math.ceil(edge / step), counts = new Array(2 * half).fill(0);
  for (const value of values) counts[Math.min(Math.max(Math.floor(value / step) + half, 0), 2 * half - 1)] += 1;
  return { values, step, half, counts, mean: values.reduce((sum, one) => sum + one, 0) / values.length };
}

function binEdges(bins, at) {
  const low = at === 0 ? -Infinity : (at - bins.half) * bins.step;
  const high = at === bins.counts.length - 1 ? Infinity : (at - bins.half + 1) * bins.step;
  return [low, high];
}

function drawSpread() {
  let variant = state.names.length > 1 ? 0 : -1;
  const figure = chart("spread", ["spread", "chosen"], (host, whole) => {
    const trades = ofVariant(variant), bins = binned(trades), code = Math.max(variant, 0);
    if (!bins) return emptied(host, "No position was opened.");
    const bounds = meanBounds(trades), reach = bins.half * bins.step;
    const frame = new Frame(host, 300, { left: 48, right: 12, top: 64, bottom: 42 }, `Results of ${counted(bins.values.length, "position", "positions")}: mean ${percent(bins.mean, 2, true)}, from ${percent(bins.values[0], 1, true)} to ${percent(bins.values[bins.values.length - 1], 1, true)}`);
    const x = linear(-reach, reach, frame.left, frame.right), y = linear(0, Math.max(...bins.counts), frame.bottom, frame.top);
    frame.ticksUp(y, niceTicks(0, Math.max(...bins.counts), 4), (tick) => number(tick, 0));
    frame.ticksAcross(x, niceTicks(-reach, reach, frame.narrow ? 4 : 8), (tick) => percent(tick, Math.abs(bins.step) < 0.0025 ? 1 : 0, true));
    frame.text((frame.left + frame.right) / 2, frame.height - 4, "result on what the position tied up", "middle");
    const rects = bins.counts.map((count, at) => frame.add("rect", {
      x: x((at - bins.half) * bins.step) + 0.5, width: Math.max(x(bins.step) - x(0) - 1, 1), y: y(count), height: frame.bottom - y(count), class: `bar hit ${hue(code)}`,
    }));
    frame.add("line", { x1: x(0), x2: x(0), y1: frame.top, y2: frame.bottom, class: "zero" });
    upright(frame, x(bins.mean), `mean ${percent(bins.mean, 2, true)}`, 0);
    if (Number.isFinite(bounds.best)) upright(frame, Math.min(x(bounds.best), frame.right), `mean best ${percent(bounds.best, 1, true)}`, 1);
    if (Number.isFinite(bounds.worst)) upright(frame, Math.max(x(-bounds.worst), frame.left), `mean worst ${percent(-bounds.worst, 1, true)}`, 2);
    const mine = [...state.chosen].filter((at) => variant < 0 || state.trades.variant.codes[at] === variant).slice(0, 400);
    for (const at of mine) frame.add("circle", { cx: x(Math.min(Math.max(state.trades.return_on_debit[at], -reach), reach)), cy: frame.bottom, r: 3.2, class: "mark-trade" });
    const say = (at) => { const [low, high] = binEdges(bins, at); readout(whole, `${between(low, high)}: ${counted(bins.counts[at], "position", "positions")}, ${percent(bins.counts[at] / bins.values.length)} of all`); };
    const act = (at) => { const [low, high] = binEdges(bins, at); chooseFromChart({ low, high, variant }, `result ${between(low, high)}`); };
    rects.forEach((rect, at) => { rect.addEventListener("pointerenter", () => say(at)); rect.addEventListener("click", () => act(at)); });
    walkable(frame.svg, rects.length, say, act, (at) => rects.forEach((rect, one) => rect.classList.toggle("chosen-bar", one === at)));
  });
  variantChoice(figure, (code) => { variant = code; tell("spread"); }, variant);
}

function between(low, high) {
  if (low === -Infinity) return `below ${percent(high, 1, true)}`;
  if (high === Infinity) return `${percent(low, 1, true)} or more`;
  return `${percent(low, 1, true)} to ${percent(high, 1, true)}`;
}

function upright(frame, x, words, row) {
  const right = x > (frame.left + frame.right) / 2;
  frame.add("line", { x1: x, x2: x, y1: frame.top - 10 - row * 15, y2: frame.bottom, class: "mean" });
  frame.text(right ? Math.min(x, frame.right) - 5 : Math.max(x, frame.left) + 5, frame.top - 14 - row * 15, words, right ? "end strong" : "strong");
}

function meanBounds(trades) {
  const t = state.trades, mean = (pick) => {
    const values = trades.map(pick).filter(Number.isFinite);
    return values.length ? values.reduce((sum, one) => sum + one, 0) / values.length : NaN;
  };
  const tied = (at) => t.pnl[at] / t.return_on_debit[at];
  return { best: mean((at) => t.best_gain[at] / tied(at)), worst: mean((at) => t.worst_loss[at] / tied(at)) };
}

function variantChoice(figure, change, chosen) {
  if (state.names.length < 2) return;
  const codes = [...state.names.keys(), -1];
  figure.querySelector(".controls").append(
    choice("Variant", [...state.names, "all together"], codes.indexOf(chosen), (at) => change(codes[at])));
}

const OUTCOME_ORDER = ["best gain", "between", "floor", "cut", "stop", "assigned", "gone", "open"];

function drawOutcomes() {
  let variant = state.names.length > 1 ? 0 : -1;
  const figure = chart("outcomes", ["outcomes", "chosen"], (host, whole) => {
    const used = outcomesOf(variant);
    if (!used.length) return emptied(host, "No position was opened.");
    const narrow = host.clientWidth < 480, step = narrow ? 58 : 40;
    const frame = new Frame(host, used.length * step + 44, { left: 82, right: 8, top: 30, bottom: 8 }, `Positions by outcome: ${used.map((row) => `${row.word} ${row.count}, ${number(row.money, 0, true)}`).join("; ")}`);
    const scales = outcomeScales(frame, used, narrow);
    frame.text(frame.left, 14, narrow ? "positions, and money below" : "positions");
    if (!narrow) frame.text(scales.money(0), 14, "money", "middle");
    const marked = new Set([...state.chosen].map((at) => state.trades.outcome.codes[at]));
    const groups = used.map((row, at) => outcomeRow(frame, row, frame.top + at * step, scales, { narrow, variant, marked }));
    frame.add("line", { x1: scales.money(0), x2: scales.money(0), y1: frame.top - 4, y2: frame.height, class: "zero" });
    const all = used.reduce((sum, row) => sum + row.count, 0);
    const say = (at) => readout(whole, `${used[at].word}: ${counted(used[at].count, "position", "positions")} (${percent(used[at].count / all)}), together ${number(used[at].money, 0, true)}, each ${number(used[at].money / used[at].count, 0, true)}`);
    const act = (at) => chooseFromChart({ outcome: used[at].code, variant }, `outcome ${used[at].word}`);
    groups.forEach((group, at) => { group.addEventListener("pointerenter", () => say(at)); group.addEventListener("click", () => act(at)); });
    walkable(frame.svg, used.length, say, act);
  });
  variantChoice(figure, (code) => { variant = code; tell("outcomes"); }, variant);
}

function outcomesOf(variant) {
  const t = state.trades, rows = OUTCOME_ORDER.map((word) => ({ word, count: 0, money: 0, code: t.outcome.words.indexOf(word) }));
  for (const at of ofVariant(variant)) {
    const row = rows[OUTCOME_ORDER.indexOf(t.outcome.words[t.outcome.codes[at]])];
    row.count += 1;
    row.money += t.pnl[at] || 0;
  }
  return rows.filter((row) => row.count);
}

function outcomeScales(frame, used, narrow) {
  const middle = narrow ? frame.right : frame.left + (frame.right - frame.left) * 0.42, pad = narrow ? 70 : 84;
  const low = Math.min(0, ...used.map((row) => row.money)), high = Math.max(0, ...used.map((row) => row.money));
  const from = (narrow ? frame.left : middle) + (low < 0 ? pad : 10), to = frame.right - (high > 0 ? pad : 10);
  return { count: linear(0, Math.max(...used.map((row) => row.count)), frame.left, middle - 58), money: linear(low, high, from, to) };
}

function outcomeRow(frame, row, y, scales, { narrow, variant, marked }) {
  const group = frame.add("g", { class: "hit", "data-outcome": row.word }), under = narrow ? 22 : 0, height = narrow ? 18 : 22;
  const put = (name, attributes, ...rest) => group.append(draw(name, attributes, ...rest));
  const line = y + height - 2;
  put("rect", { x: 0, y, width: frame.width, height: 28 + under, class: "reach" });
  put("text", { x: frame.left - 8, y: line, class: "end strong" }, row.word);
  put("rect", { x: frame.left, width: Math.max(scales.count(row.count) - frame.left, 1), y: y + 3, height, class: `bar ${hue(Math.max(variant, 0))}` });
  put("text", { x: scales.count(row.count) + 6, y: line, class: "strong" }, number(row.count, 0));
  const [from, to] = [scales.money(0), scales.money(row.money)].sort((a, b) => a - b);
  put("rect", { x: from, width: Math.max(to - from, 1), y: y + 3 + under, height, class: `bar ${row.money < 0 ? "c-1" : "c-6"}` });
  put("text", { x: row.money < 0 ? from - 6 : to + 6, y: line + under, class: row.money < 0 ? "end strong" : "strong" }, number(row.money, 0, true));
  if (marked.has(row.code)) put("rect", { x: 1, y, width: frame.width - 2, height: 28 + under, class: "chosen" });
  return group;
}
