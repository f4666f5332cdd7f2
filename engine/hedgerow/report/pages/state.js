// What the parts of the page share: the trades, which of them are shown and chosen, the session looked at.

const state = {
  trades: null, // columns by name
  count: 0,
  names: [], // variants
  hidden: new Set(), // variants not drawn
  cursor: null, // session looked at
  shown: new Uint32Array(0), // trades that pass the filters, in the ledger's order
  chosen: new Set(), // trades marked in the charts
  filters: {},
};
const NO_FILTERS = { variant: -1, symbol: -1, outcome: -1, text: "", from: null, to: null, low: null, high: null, told: "" };
state.filters = { ...NO_FILTERS };

const listeners = {};
function on(event, act) { (listeners[event] ||= []).push(act); }
function tell(event) { for (const act of listeners[event] || []) act(); }

// Trades that pass the filters, in the order of their numbers.
function passing(filters) {
  const t = state.trades, { variant, symbol, outcome, from, to, low, high } = filters;
  const variants = t.variant.codes, symbols = t.symbol.codes, outcomes = t.outcome.codes;
  const text = filters.text.trim().toLowerCase();
  const holding = text ? wordsWith(text) : null;
  const dated = /^[\d-]{4,}$/.test(text);
  const kept = new Uint32Array(state.count);
  let size = 0;
  for (let at = 0; at < state.count; at += 1) {
    if (variant >= 0 && variants[at] !== variant) continue;
    if (symbol >= 0 && symbols[at] !== symbol) continue;
    if (outcome >= 0 && outcomes[at] !== outcome) continue;
    if (from !== null && !(t.closed[at] >= from && t.closed[at] <= to)) continue;
    if (low !== null && !(t.return_on_debit[at] >= low && t.return_on_debit[at] < high)) continue;
    if (holding && !holding.some(([codes, found]) => found[codes[at]])
      && !(dated && (dateText(t.opened[at]).startsWith(text) || dateText(t.closed[at]).startsWith(text)))) continue;
    kept[size] = at;
    size += 1;
  }
  return kept.subarray(0, size);
}

function wordsWith(text) {
  return ["variant", "symbol", "outcome", "reason"].map((name) => {
    const { words, codes } = state.trades[name];
    return [codes, words.map((word) => word.toLowerCase().includes(text))];
  });
}

// A chart chose some trades: the ledger shows them, and they are marked everywhere.
function chooseFromChart(part, told) {
  state.filters = { ...state.filters, from: null, to: null, low: null, high: null, ...part, told };
  state.chosen = new Set(passing(state.filters));
  tell("filters");
  tell("chosen");
}

function clearFilters() {
  state.filters = { ...NO_FILTERS };
  state.chosen = new Set();
  tell("filters");
  tell("chosen");
}

function toggleChosen(trade) {
  if (!state.chosen.delete(trade)) state.chosen.add(trade);
  tell("chosen");
}
