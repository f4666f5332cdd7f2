// Results month by month as a table of coloured cells, which choose their trades.

function monthlyResults(line) {
  const months = new Map();
  let before = line.values[0];
  for (let at = 0; at < curves.dates.length; at += 1) {
    const day = new Date(curves.dates[at] * 86400000), month = day.getUTCFullYear() * 12 + day.getUTCMonth();
    if (!months.has(month)) months.set(month, { start: at ? line.values[at - 1] : before, end: 0 });
    months.get(month).end = line.values[at];
  }
  return new Map([...months].map(([month, { start, end }]) => [month, end / start - 1]));
}

const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

function drawCalendar() {
  const figure = byId("calendar"), host = figure.querySelector(".plot");
  const lines = [...curves.lines, ...(curves.yardstick ? [curves.yardstick] : [])];
  const show = (number_) => {
    const line = lines[number_], results = monthlyResults(line);
    const sizes = [...results.values()].map(Math.abs).sort((a, b) => a - b), full = sizes[Math.floor(sizes.length * 0.95)] || 0.01;
    const years = [...new Set([...results.keys()].map((month) => Math.floor(month / 12)))];
    const body = years.map((year) => make("tr", {}, make("th", { scope: "row" }, String(year)),
      ...MONTHS.map((_, at) => monthCell(line, year, at, results.get(year * 12 + at), full)), yearCell(results, year)));
    const head = make("tr", {}, make("th", { scope: "col" }, make("span", {}, "Year")), ...MONTHS.map((one) => make("th", { scope: "col" }, one)), make("th", { scope: "col" }, "Year's result"));
    const table = make("table", { class: "months" }, make("caption", { class: "how" }, `${line.name}, result of each month in percent`), make("thead", {}, head), make("tbody", {}, ...body));
    host.replaceChildren(make("div", { class: "scroll", tabindex: "0", role: "region", "aria-label": "Month by month, a table" }, table));
  };
  const names = lines.map((one) => one.name);
  if (names.length > 1) figure.querySelector(".controls").append(choice("Variant", names, 0, show));
  if (curves.dates.length) show(0);
}

function monthCell(line, year, month, result, full) {
  if (result === undefined) return make("td");
  const share = Math.min(Math.abs(result) / full, 1) * 0.52;
  const told = `${MONTHS[month]} ${year}: ${percent(result, 1, true)}`;
  const act = () => {
    const from = Date.UTC(year, month, 1) / 86400000, to = Date.UTC(year, month + 1, 0) / 86400000;
    const variant = line.code < 0 ? -1 : state.trades.variant.words.indexOf(line.name);
    chooseFromChart({ from, to, variant }, `ended in ${MONTHS[month]} ${year}`);
  };
  const button = make("button", { type: "button", "aria-label": told, title: told, onclick: act }, number(result * 100, 1, false));
  button.style.background = `rgba(var(--heat-${result < 0 ? "bad" : "good"}), ${share.toFixed(2)})`;
  return make("td", {}, button);
}

function yearCell(results, year) {
  let whole = 1;
  for (let month = 0; month < 12; month += 1) whole *= 1 + (results.get(year * 12 + month) ?? 0);
  return make("td", { class: "year" }, percent(whole - 1, 1, true));
}
