// What the answer leans on: the interval, draws, premiums, starts, odds, and the year ahead.

const codeOf = (name) => state.names.indexOf(name);

function pointerPlace(frame, event) {
  const box = frame.svg.getBoundingClientRect();
  return ((event.clientX - box.left) / box.width) * frame.width;
}

// The interval of the difference under the verdict, on a line through nothing.
function drawInterval(evidence) {
  const host = byId("interval");
  const pair = evidence && evidence.pairs.length ? evidence.pairs[evidence.headline ?? 0] : null;
  if (!pair || pair.growth.low === null) return;
  const { difference, low, high } = pair.growth;
  const paint = () => {
    const frame = new Frame(host, 92, { left: 14, right: 14, top: 26, bottom: 40 }, `${pair.first} less ${pair.second}, growth a year: ${percent(difference, 2, true)}, interval ${percent(low, 2, true)} to ${percent(high, 2, true)}`);
    const edge = Math.max(Math.abs(low), Math.abs(high)) * 1.15, x = linear(-edge, edge, frame.left, Math.min(frame.right, 720)), y = 40;
    const end = Math.min(frame.right, 720);
    frame.add("line", { x1: frame.left, x2: end, y1: y, y2: y, class: "grid" });
    for (const tick of niceTicks(-edge, edge, frame.narrow ? 4 : 8)) frame.text(x(tick), y + 26, percent(tick, edge < 0.02 ? 1 : 0, true), "middle");
    frame.text(frame.left, y + 46, `${shortened(pair.second, 24)} ahead`);
    frame.text(end, y + 46, `${shortened(pair.first, 24)} ahead`, "end");
    frame.add("line", { x1: x(0), x2: x(0), y1: y - 20, y2: y + 12, class: "zero" });
    frame.add("rect", { x: x(low), width: Math.max(x(high) - x(low), 2), y: y - 7, height: 14, rx: 3, class: `area inner ${hue(codeOf(pair.first))}` });
    frame.add("line", { x1: x(low), x2: x(high), y1: y, y2: y, class: `whisker ${hue(codeOf(pair.first))}` });
    frame.add("circle", { cx: x(difference), cy: y, r: 6, class: `dot ${hue(codeOf(pair.first))}` });
    frame.text(x(difference), y - 14, percent(difference, 2, true), "middle strong");
  };
  let width = 0;
  new ResizeObserver(() => { if (Math.abs(host.clientWidth - width) > 1) { width = host.clientWidth; paint(); } }).observe(host);
}

async function drawDraws(data) {
  if (!data.evidence) return;
  const all = await Promise.all(data.differences.map(async (one) => ({ ...one, draws: [...await column(one.draws)].filter(Number.isFinite).sort((a, b) => a - b) })));
  let chosen = 0;
  const figure = chart("draws", ["draws"], (host, whole) => {
    const one = all[chosen];
    if (!one || !one.draws.length) return emptied(host, "No difference was drawn: the record is too short, or no evidence was asked for.");
    const pair = data.evidence.pairs.find((other) => other.first === one.first && other.second === one.second);
    const { difference, low, high } = pair.growth, values = one.draws, bins = 45;
    const least = Math.min(values[0], low ?? 0, 0), most = Math.max(values[values.length - 1], high ?? 0, 0), step = (most - least) / bins || 0.001;
    const counts = new Array(bins).fill(0);
    for (const value of values) counts[Math.min(Math.floor((value - least) / step), bins - 1)] += 1;
    const behind = values.filter((value) => value < 0).length / values.length;
    const told = `${one.first} less ${one.second}: ${percent(difference, 2, true)} a year, interval ${percent(low, 2, true)} to ${percent(high, 2, true)}; behind in ${percent(behind, 1)} of ${number(values.length, 0)} draws`;
    const frame = new Frame(host, 270, { left: 14, right: 14, top: 34, bottom: 42 }, told);
    const x = linear(least, most, frame.left, frame.right), y = linear(0, Math.max(...counts), frame.bottom, frame.top);
    if (low !== null) frame.add("rect", { x: x(low), width: x(high) - x(low), y: frame.top, height: frame.bottom - frame.top, class: "held" });
    counts.forEach((count, at) => frame.add("rect", { x: x(least + at * step) + 0.5, width: Math.max(x(least + step) - x(least) - 1, 1), y: y(count), height: frame.bottom - y(count), class: `bar ${hue(codeOf(one.first))}` }));
    frame.add("line", { x1: frame.left, x2: frame.right, y1: frame.bottom, y2: frame.bottom, class: "grid" });
    frame.ticksAcross(x, niceTicks(least, most, frame.narrow ? 4 : 7), (tick) => percent(tick, most - least < 0.03 ? 1 : 0, true));
    frame.add("line", { x1: x(0), x2: x(0), y1: frame.top - 12, y2: frame.bottom, class: "zero" });
    frame.text(x(0), frame.top - 16, "no difference", x(0) > frame.width * 0.75 ? "end" : x(0) < frame.width * 0.25 ? "" : "middle");
    frame.add("line", { x1: x(difference), x2: x(difference), y1: frame.top, y2: frame.bottom, class: "mean" });
    frame.text((frame.left + frame.right) / 2, frame.height - 4, `growth a year, ${shortened(one.first, 20)} less ${shortened(one.second, 20)}`, "middle");
    readout(whole, told);
  });
  const names = all.map((one) => `${one.first} less ${one.second}`);
  if (names.length > 1) figure.querySelector(".controls").append(choice("Pair", names, 0, (at) => { chosen = at; tell("draws"); }));
}

async function drawPremium(data) {
  if (!data.evidence) return;
  const cells = data.stress ? await columns(data.stress) : null, pairs = data.evidence ? data.evidence.pairs : [];
  const known = cells ? pairs.filter((one) => cells.names.includes(one.first) && stressRows(cells, one).length) : [];
  let chosen = Math.max(known.indexOf(pairs[data.evidence ? data.evidence.headline ?? 0 : 0]), 0), across = 0;
  const figure = chart("premium", ["premium"], (host, whole) => {
    const pair = known[chosen];
    if (!pair) return emptied(host, "Premiums were not changed in this study.");
    const field = ["ratio", "half_spread"][across], flip = across ? pair.flip_spread : pair.flip_premium, basis = data.evidence.basis;
    const lines = stressLines(cells, pair, field, basis);
    if (!lines.length || lines[0].rows.length < 2) return emptied(host, "This assumption was not changed in this study.");
    const values = lines.flatMap((one) => one.rows.flatMap((row) => (one.base ? [cells.difference[row], cells.low[row], cells.high[row]] : [cells.difference[row]]))).filter(Number.isFinite);
    const places = lines[0].rows.map((row) => cells[field][row]), low = Math.min(0, ...values), high = Math.max(0, ...values), pad = (high - low) * 0.06 || 0.01;
    const wide = !field.startsWith("half") && lines.length > 1;
    const told = flip && flip.value !== null ? `equal at ${across ? percent(flip.value) : number(flip.value)}` : "nowhere equal in this range";
    const frame = new Frame(host, 300, { left: 54, right: wide ? 84 : 14, top: 18, bottom: 42 }, `${pair.first} less ${pair.second} by assumption: ${told}`);
    const x = linear(places[0], places[places.length - 1], frame.left, frame.right), y = linear(low - pad, high + pad, frame.bottom, frame.top);
    const say = across ? (tick) => percent(tick, 1) : (tick) => number(tick, 2);
    frame.ticksUp(y, niceTicks(low - pad, high + pad, 6), (tick) => percent(tick, high - low < 0.03 ? 1 : 0, true));
    frame.ticksAcross(x, places, (tick) => say(tick));
    frame.text((frame.left + frame.right) / 2, frame.height - 4, across ? "half-spread, of the premium" : "implied over realized volatility", "middle");
    frame.add("line", { x1: frame.left, x2: frame.right, y1: y(0), y2: y(0), class: "zero" });
    const assumed = across ? basis.half_spread : basis.ratio;
    frame.add("line", { x1: x(assumed), x2: x(assumed), y1: frame.top, y2: frame.bottom, class: "mean" });
    frame.text(x(assumed) + 5, frame.top + 8, "assumed");
    for (const one of lines) {
      const xs = one.rows.map((row) => x(cells[field][row]));
      if (one.base) frame.band(xs, one.rows.map((row) => y(cells.low[row])), one.rows.map((row) => y(cells.high[row])), "c-0");
      frame.line(xs, one.rows.map((row) => y(cells.difference[row])), one.base ? "c-0" : `${hue(one.code)} dashed`);
    }
    if (wide) frame.endNames(lines.map((one) => ({ name: `skew ${number(one.skew, 2, true)}`, y: y(cells.difference[one.rows[one.rows.length - 1]]) })));
    if (flip && flip.value !== null) {
      const from = flip.low ?? flip.least, to = flip.high ?? flip.most;
      frame.add("line", { x1: x(from), x2: x(to), y1: y(0), y2: y(0), class: "whisker c-1", "stroke-width": 5, "stroke-opacity": 0.6 });
      frame.add("circle", { cx: x(flip.value), cy: y(0), r: 6, class: "dot c-1" });
      frame.text(x(flip.value), y(0) - 12, `equal at ${say(flip.value)}`, "middle strong");
    }
    const base = lines.find((one) => one.base) || lines[0];
    const read = (at) => { const row = base.rows[at]; readout(whole, `${across ? "half-spread" : "ratio"} ${say(cells[field][row])}: ${percent(cells.difference[row], 2, true)} a year (${percent(cells.low[row], 2, true)} to ${percent(cells.high[row], 2, true)}); ${told}`); };
    walkable(frame.svg, base.rows.length, read, () => {});
    frame.svg.addEventListener("pointermove", (event) => {
      const at = pointerPlace(frame, event), far = base.rows.map((row) => Math.abs(x(cells[field][row]) - at));
      read(far.indexOf(Math.min(...far)));
    });
    readout(whole, `${pair.first} less ${pair.second}: ${told}`);
  });
  if (!known.length) return;
  const controls = figure.querySelector(".controls"), names = known.map((one) => `${one.first} less ${one.second}`);
  if (names.length > 1) controls.append(choice("Pair", names, chosen, (at) => { chosen = at; tell("premium"); }));
  controls.append(choice("Across", ["premium over realized", "half-spread"], 0, (at) => { across = at; tell("premium"); }));
}

function stressRows(cells, pair) {
  const first = cells.names.indexOf(pair.first), second = cells.names.indexOf(pair.second), rows = [];
  for (let row = 0; row < cells.first.length; row += 1) if (cells.first[row] === first && cells.second[row] === second) rows.push(row);
  return rows;
}

const near = (one, other) => Math.abs(one - other) < 1e-6;

function stressLines(cells, pair, field, basis) {
  const other = field === "ratio" ? "half_spread" : "ratio", rows = stressRows(cells, pair).filter((row) => near(cells[other][row], basis[other]));
  const skews = [...new Set(rows.map((row) => cells.skew[row]))].sort((a, b) => b - a);
  return skews.filter((skew) => field === "ratio" || near(skew, basis.skew)).map((skew, at) => ({
    skew, base: near(skew, basis.skew), code: at + 1,
    rows: rows.filter((row) => cells.skew[row] === skew).sort((a, b) => cells[field][a] - cells[field][b]),
  }));
}

function drawTiming(data) {
  if (!data.evidence) return;
  const rows = data.evidence ? data.evidence.timing.filter((one) => one.starts > 1) : [];
  chart("timing", [], (host, whole) => {
    if (!rows.length) return emptied(host, "No start was changed: the rules have no fixed cycle, or none was asked for.");
    const all = rows.flatMap((one) => [...one.growths, one.laddered]), low = Math.min(...all), high = Math.max(...all), pad = (high - low) * 0.08 || 0.002;
    const frame = new Frame(host, rows.length * 44 + 50, { left: 14, right: 14, top: 8, bottom: 34 }, `Growth a year by start: ${rows.map((one) => `${one.variant} ${percent(one.lowest, 2, true)} to ${percent(one.highest, 2, true)}`).join("; ")}`);
    const x = linear(low - pad, high + pad, frame.left, frame.right);
    frame.ticksAcross(x, niceTicks(low - pad, high + pad, frame.narrow ? 4 : 7), (tick) => percent(tick, 1, true));
    rows.forEach((one, at) => {
      const y = frame.top + at * 44 + 26, kind = hue(codeOf(one.variant));
      frame.text(frame.left, y - 14, `${shortened(one.variant, 34)}, ${one.starts} starts of a cycle of ${one.cycle_sessions} sessions`);
      frame.add("line", { x1: frame.left, x2: frame.right, y1: y, y2: y, class: "grid" });
      frame.add("rect", { x: x(one.lowest), width: Math.max(x(one.highest) - x(one.lowest), 1), y: y - 6, height: 12, rx: 3, class: `area ${kind}` });
      for (const growth of one.growths) frame.add("line", { x1: x(growth), x2: x(growth), y1: y - 5, y2: y + 5, class: `whisker ${kind}` });
      frame.add("circle", { cx: x(one.laddered), cy: y, r: 5, class: `ring ${kind}` });
      frame.add("circle", { cx: x(one.as_run), cy: y, r: 5, class: `dot ${kind}` });
    });
    const say = (at) => readout(whole, `${rows[at].variant}: as begun ${percent(rows[at].as_run, 2, true)}, worst ${percent(rows[at].lowest, 2, true)}, best ${percent(rows[at].highest, 2, true)}, spread over all starts ${percent(rows[at].laddered, 2, true)}`);
    walkable(frame.svg, rows.length, say, () => {});
    say(0);
  });
}

function drawOdds(data) {
  if (!data.evidence) return;
  const rows = data.evidence ? data.evidence.variants.filter((one) => one.odds) : [];
  let chosen = 0;
  const figure = chart("odds", ["odds"], (host, whole) => {
    const one = rows[chosen];
    if (!one) return emptied(host, "No odds to check: too many positions left early, or none had odds of a best gain.");
    const bins = one.odds.rows.filter((row) => row.forecasts), kind = hue(codeOf(one.variant));
    const frame = new Frame(host, 330, { left: 48, right: 14, top: 12, bottom: 42 }, `Odds of the best gain: ${percent(one.odds.forecast)} given, ${percent(one.odds.observed)} seen`);
    const side = Math.min(frame.right - frame.left, 420), x = linear(0, 1, frame.left, frame.left + side), y = linear(0, 1, frame.bottom, frame.top);
    frame.right = frame.left + side;
    frame.ticksUp(y, [0, 0.25, 0.5, 0.75, 1], (tick) => percent(tick, 0));
    frame.ticksAcross(x, [0, 0.25, 0.5, 0.75, 1], (tick) => percent(tick, 0));
    frame.text(frame.left + side / 2, frame.height - 4, "odds given at entry (across), share that came (up)", "middle");
    frame.add("line", { x1: x(0), y1: y(0), x2: x(1), y2: y(1), class: "mean" });
    const most = Math.max(...bins.map((row) => row.forecasts));
    for (const row of bins) {
      if (row.low !== null) frame.add("line", { x1: x(row.forecast), x2: x(row.forecast), y1: y(row.low), y2: y(row.high), class: `whisker ${kind}` });
      frame.add("circle", { cx: x(row.forecast), cy: y(row.observed), r: 3 + 6 * Math.sqrt(row.forecasts / most), class: `dot ${kind}` });
    }
    const say = (at) => readout(whole, `${percent(bins[at].forecast)} given, ${percent(bins[at].observed)} came, of ${counted(bins[at].forecasts, "position", "positions")} (${percent(bins[at].low ?? NaN)} to ${percent(bins[at].high ?? NaN)})`);
    walkable(frame.svg, bins.length, say, () => {});
    frame.svg.addEventListener("pointermove", (event) => { const at = pointerPlace(frame, event), far = bins.map((row) => Math.abs(x(row.forecast) - at)); say(far.indexOf(Math.min(...far))); });
    readout(whole, `All together: ${percent(one.odds.forecast)} given, ${percent(one.odds.observed)} came (${percent(one.odds.low)} to ${percent(one.odds.high)}) of ${number(one.odds.forecasts, 0)}; Brier score ${number(one.odds.brier, 3)}`);
  });
  if (rows.length > 1) figure.querySelector(".controls").append(choice("Variant", rows.map((one) => one.variant), 0, (at) => { chosen = at; tell("odds"); }));
}

async function drawAhead(data) {
  if (!data.evidence) return;
  const all = await Promise.all(data.fans.variants.map(async (one) => ({ ...one, levels: await Promise.all(one.levels.map(column)) })));
  let chosen = 0;
  const figure = chart("ahead", ["ahead"], (host, whole) => {
    const one = all[chosen];
    if (!one) return emptied(host, "No year ahead was drawn: no position was held, or no evidence was asked for.");
    const own = data.evidence.variants.find((other) => other.variant === one.variant).own, kind = hue(codeOf(one.variant));
    const rows = one.levels.map((row) => [1, ...row]), low = Math.min(...rows[0]), high = Math.max(...rows[4]), pad = (high - low) * 0.05 || 0.01;
    const frame = new Frame(host, 330, { left: 52, right: 96, top: 12, bottom: 42 }, `A year ahead for ${one.variant}: middle ${percent(own.median, 1, true)}, one in twenty below ${percent(own.low, 1, true)}`);
    const x = linear(0, rows[0].length - 1, frame.left, frame.right), y = linear(low - pad, high + pad, frame.bottom, frame.top), xs = rows[0].map((_, at) => x(at));
    frame.ticksUp(y, niceTicks(low - pad, high + pad, 6), (tick) => percent(tick - 1, high - low < 0.08 ? 1 : 0, true));
    frame.ticksAcross(x, frame.narrow ? [0, 126, 252] : [0, 63, 126, 189, 252], (tick) => String(tick));
    frame.text((frame.left + frame.right) / 2, frame.height - 4, "sessions ahead", "middle");
    frame.add("line", { x1: frame.left, x2: frame.right, y1: y(1), y2: y(1), class: "zero" });
    frame.band(xs, rows[0].map(y), rows[4].map(y), kind);
    frame.band(xs, rows[1].map(y), rows[3].map(y), `inner ${kind}`);
    frame.line(xs, rows[2].map(y), kind);
    frame.endNames(["1 in 20 below", "a quarter below", "middle", "a quarter above", "1 in 20 above"].map((name, at) => ({ name, y: y(rows[at][rows[at].length - 1]) })));
    const say = (at) => readout(whole, `after ${counted(at, "session", "sessions")}: middle ${percent(rows[2][at] - 1, 1, true)}, half between ${percent(rows[1][at] - 1, 1, true)} and ${percent(rows[3][at] - 1, 1, true)}, nine of ten between ${percent(rows[0][at] - 1, 1, true)} and ${percent(rows[4][at] - 1, 1, true)}`);
    walkable(frame.svg, rows[0].length, say, () => {});
    frame.svg.addEventListener("pointermove", (event) => say(Math.min(Math.max(Math.round(((pointerPlace(frame, event) - frame.left) / (frame.right - frame.left)) * (rows[0].length - 1)), 0), rows[0].length - 1)));
    readout(whole, `At ${percent(own.share)} of equity a position: a loss in ${percent(own.chance_of_loss, 0)} of years, a fall of ${percent(own.drawdown_limit, 0)} in ${percent(own.chance_of_drawdown, 0)}, ${percent(own.target, 0)} or more in ${percent(own.chance_of_target, 0)}`);
  });
  if (all.length > 1) figure.querySelector(".controls").append(choice("Variant", all.map((one) => one.variant), 0, (at) => { chosen = at; tell("ahead"); }));
}
