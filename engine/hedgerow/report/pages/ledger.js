// The ledger: filters, a sheet of which only the rows in sight are made, marking, and opening of trades.

const ROW = 30;
const money = (value) => number(value, 0);
const FIELDS = [
  { name: "variant", title: "Variant", width: 9, word: true },
  { name: "symbol", title: "Symbol", width: 5.5, word: true },
  { name: "opened", title: "Opened", width: 6.6, say: dateText },
  { name: "closed", title: "Closed", width: 6.6, say: (day) => (Number.isFinite(day) ? dateText(day) : "open") },
  { name: "sessions", title: "Sessions held", width: 5, say: money, right: true },
  { name: "pnl", title: "Result, money", width: 6.5, say: (value) => number(value, 2, true), right: true, sign: true },
  { name: "return_on_debit", title: "Result, of debit", width: 5.8, say: (value) => percent(value, 2, true), right: true, sign: true },
  { name: "outcome", title: "Outcome", width: 6, word: true },
  { name: "reason", title: "What ended it", width: 9, word: true },
  { name: "shares", title: "Shares", width: 5, say: money, right: true },
  { name: "net_debit", title: "Net debit", width: 6.5, say: (value) => number(value, 2), right: true },
  { name: "best_gain", title: "Best gain", width: 6, say: (value) => number(value, 2), right: true },
  { name: "worst_loss", title: "Worst loss", width: 6, say: (value) => number(value, 2), right: true },
  { name: "odds_of_best", title: "Odds of best", width: 5.2, say: (value) => percent(value, 0), right: true },
  { name: "stock_pnl", title: "Stock", width: 6, say: (value) => number(value, 2, true), right: true },
  { name: "option_pnl", title: "Options", width: 6, say: (value) => number(value, 2, true), right: true },
  { name: "dividends", title: "Dividends", width: 5.4, say: (value) => number(value, 2), right: true },
  { name: "costs", title: "Costs", width: 5.2, say: (value) => number(value, 2), right: true },
];

const ledger = { sort: { name: "opened", down: false }, active: 0, body: null, sheet: null, head: null };

function cellText(field, at) {
  const values = state.trades[field.name];
  return field.word ? values.words[values.codes[at]] : field.say(values[at]);
}

// Ranks by which a column sorts: words by their alphabet, figures by size, unknown last.
const ranks = {};
function rankOf(field) {
  if (!ranks[field.name]) {
    const values = state.trades[field.name];
    if (!field.word) ranks[field.name] = values;
    else {
      const order = values.words.map((word, code) => [word, code]).sort((a, b) => a[0].localeCompare(b[0], "en")), place = [];
      order.forEach(([, code], rank) => { place[code] = rank; });
      ranks[field.name] = values.codes.map((code) => place[code]);
    }
  }
  return ranks[field.name];
}

function refresh() {
  const field = FIELDS.find((one) => one.name === ledger.sort.name), rank = rankOf(field), sign = ledger.sort.down ? -1 : 1;
  const rows = passing(state.filters);
  rows.sort((a, b) => {
    const one = rank[a], other = rank[b];
    if (one === other) return a - b;
    if (Number.isNaN(one)) return Number.isNaN(other) ? a - b : 1;
    if (Number.isNaN(other)) return -1;
    return sign * (one < other ? -1 : 1);
  });
  state.shown = rows;
  ledger.active = Math.min(ledger.active, Math.max(rows.length - 1, 0));
  ledger.body.style.height = `${Math.max(rows.length, 1) * ROW}px`;
  ledger.sheet.firstChild.setAttribute("aria-rowcount", rows.length + 1);
  for (const cell of ledger.head.children)
    cell.setAttribute("aria-sort", cell.dataset.name === ledger.sort.name ? (ledger.sort.down ? "descending" : "ascending") : "none");
  countRows();
  paintRows();
}

function countRows() {
  let sum = 0, won = 0;
  for (const at of state.shown) { sum += state.trades.pnl[at] || 0; won += state.trades.pnl[at] > 0; }
  const all = state.shown.length, told = all === state.count ? counted(all, "trade", "trades") : `${number(all, 0)} of ${counted(state.count, "trade", "trades")}`;
  const parts = [`${told}, together ${number(sum, 2, true)}${all ? `, ${percent(won / all)} won` : ""}${state.chosen.size ? `, ${number(state.chosen.size, 0)} marked` : ""}`];
  const filtered = JSON.stringify(state.filters) !== JSON.stringify(NO_FILTERS);
  if (filtered || state.chosen.size)
    parts.push(make("button", { type: "button", class: "chip", id: "clear", onclick: () => { clearFilters(); ledger.form.reset(); } },
      state.filters.told ? `${state.filters.told} ×` : "show all, mark none"));
  byId("ledger-count").replaceChildren(...parts);
}

function paintRows() {
  const { sheet, body } = ledger, first = Math.max(Math.floor((sheet.scrollTop - 60) / ROW), 0);
  const last = Math.min(first + Math.ceil(sheet.clientHeight / ROW) + 6, state.shown.length), rows = [];
  for (let place = first; place < last; place += 1) rows.push(rowOf(place));
  if (!state.shown.length) rows.push(make("div", { class: "row", role: "row" }, make("div", { class: "cell", role: "gridcell" }, state.count ? "No trade passes these filters." : "No position was opened.")));
  body.replaceChildren(...rows);
  const active = rows.find((row) => row.id === "active-row");
  if (active) sheet.setAttribute("aria-activedescendant", "active-row"); else sheet.removeAttribute("aria-activedescendant");
}

function rowOf(place) {
  const at = state.shown[place], active = place === ledger.active;
  const row = make("div", {
    class: `row${active ? " active" : ""}`, role: "row", id: active ? "active-row" : null, "aria-rowindex": place + 2,
    "aria-selected": state.chosen.has(at), "data-trade": at,
    onclick: (event) => { ledger.active = place; if (event.shiftKey || event.ctrlKey || event.metaKey) toggleChosen(at); else openTrade(place); },
  });
  row.style.top = `${place * ROW}px`;
  for (const field of FIELDS) {
    const value = field.sign ? state.trades[field.name][at] : 0;
    row.append(make("div", { class: `cell${field.right ? " right" : ""}${value < 0 ? " loss" : value > 0 ? " gain" : ""}`, role: "gridcell" }, cellText(field, at)));
  }
  return row;
}

function sortBy(name) {
  const again = ledger.sort.name === name, figure = !FIELDS.find((one) => one.name === name).word;
  ledger.sort = { name, down: again ? !ledger.sort.down : figure && !["opened", "closed"].includes(name) };
  ledger.sheet.scrollTop = 0;
  ledger.active = 0;
  refresh();
}

function moveTo(place) {
  ledger.active = Math.min(Math.max(place, 0), state.shown.length - 1);
  const { sheet } = ledger, top = ledger.active * ROW, head = ledger.head.offsetHeight;
  if (top < sheet.scrollTop) sheet.scrollTop = top;
  else if (top + ROW + head > sheet.scrollTop + sheet.clientHeight) sheet.scrollTop = top + ROW + head - sheet.clientHeight;
  paintRows();
}

function ledgerKeys(event) {
  if (event.target !== ledger.sheet) return;
  const page = Math.floor(ledger.sheet.clientHeight / ROW) - 2, all = state.shown.length;
  const step = { ArrowDown: 1, ArrowUp: -1, PageDown: page, PageUp: -page, Home: -all, End: all }[event.key];
  if (step !== undefined) moveTo(ledger.active + step);
  else if (event.key === "Enter" && all) openTrade(ledger.active);
  else if (event.key === " " && all) toggleChosen(state.shown[ledger.active]);
  else return;
  event.preventDefault();
}

function drawLedger() {
  ledger.body = make("div", { class: "body", role: "rowgroup" });
  ledger.head = make("div", { class: "row", role: "row", "aria-rowindex": 1 }, ...FIELDS.map((field) =>
    make("div", { class: `cell${field.right ? " right" : ""}`, role: "columnheader", "aria-sort": "none", "data-name": field.name },
      make("button", { type: "button", onclick: () => sortBy(field.name) }, field.title))));
  const grid = make("div", { role: "grid", "aria-label": "Every trade", "aria-colcount": FIELDS.length, "aria-multiselectable": "true" },
    make("div", { class: "head", role: "rowgroup" }, ledger.head), ledger.body);
  ledger.sheet = make("div", { class: "sheet", tabindex: "0", role: "group", "aria-label": "Every trade: arrow keys move, Enter opens, space marks" }, grid);
  ledger.sheet.style.setProperty("--tracks", FIELDS.map((field) => `${field.width}rem`).join(" "));
  ledger.sheet.addEventListener("scroll", paintRows, { passive: true });
  ledger.sheet.addEventListener("keydown", ledgerKeys);
  byId("ledger").replaceChildren(ledger.sheet);
  drawFilters();
  on("filters", refresh);
  on("chosen", () => { countRows(); paintRows(); });
  refresh();
}

function drawFilters() {
  ledger.form = byId("filters");
  ledger.form.addEventListener("submit", (event) => event.preventDefault());
  const words = (name, label, all) => {
    const list = state.trades[name].words, order = [...list.keys()].sort((a, b) => list[a].localeCompare(list[b], "en"));
    const picked = choice(label, [all, ...order.map((code) => list[code])], 0, (at) => set({ [name]: at ? order[at - 1] : -1 }));
    return list.length > 1 ? picked : null;
  };
  const set = (part) => { state.filters = { ...state.filters, ...part }; ledger.sheet.scrollTop = 0; ledger.active = 0; tell("filters"); };
  const search = make("input", { type: "search", placeholder: "symbol, reason, 2020-03", oninput: () => set({ text: search.value }) });
  const parts = [make("label", {}, "Search", search), words("variant", "Variant", "all"), words("symbol", "Symbol", "all"), words("outcome", "Outcome", "all")];
  ledger.form.replaceChildren(...parts.filter(Boolean));
}
