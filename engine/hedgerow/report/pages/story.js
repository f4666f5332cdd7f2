// What happened to a position, told as `events/narrate.py` tells it; a test compares the two.

function tellStory(e) {
  return [...e.kind].map((kind, at) => `${dateText(e.day[at])}: ${TELLERS[kind](e, at)}.`);
}

function cashOf(e, at) {
  const expected = Math.floor((-e.quantity[at] * e.price[at] - e.fee[at]) * 100 + 0.5);
  const cash = (e.odd[at] + expected) / 100, fees = e.fee[at] > 0 ? `, ${number(e.fee[at])} of fees counted in` : "";
  return { cash, told: cash === 0 && !fees ? "no money moved" : `${number(Math.abs(cash))} ${cash >= 0 ? "received" : "paid"}${fees}` };
}

const reasonOf = (e, at) => e.meaning.reasons[e.reason[at]] || "";
const whyOf = (e, at) => (reasonOf(e, at) ? ` (${reasonOf(e, at)})` : "");
const legWord = (e, at) => (e.leg[at] === -1 ? "shares" : (e.meaning.legs[e.leg[at]] || [""])[0]);

function sizeText(quantity) {
  const size = Math.abs(quantity);
  if (Number.isInteger(size)) return number(size, 0);
  const places = Math.max(3 - Math.floor(Math.log10(size)), 0);
  return places ? number(size, places).replace(/\.?0+$/, "") : number(size, 0);
}

function atText(e, at) {
  const middle = Number.isFinite(e.mid[at]) ? ` (middle ${number(e.mid[at], 4)})` : "";
  return `at ${number(e.price[at], 4)}${middle}`;
}

function optionText(e, at) {
  const [name, right] = e.meaning.legs[e.leg[at]], contracts = sizeText(e.quantity[at] / 100);
  const named = name.includes(right) ? name : `${name}, a ${right},`;
  const until = Number.isFinite(e.expiry[at]) ? ` to ${dateText(e.expiry[at])}` : "";
  return `${contracts} ${contracts === "1" ? "contract" : "contracts"} of the ${named} struck at ${number(e.strike[at])}${until} on ${e.symbol}`;
}

const dealt = (what) => (e, at) =>
  `${e.quantity[at] > 0 ? "Bought" : "Sold"} ${what(e, at)} ${atText(e, at)}${whyOf(e, at)}: ${cashOf(e, at).told}`;

const delivered = (word) => (e, at) => {
  const settled = e.price[at] > 0 ? `, settled ${atText(e, at)}` : "", verb = Math.abs(e.quantity[at]) === 100 ? "was" : "were";
  return `${optionText(e, at)} ${verb} ${word} with the stock at ${number(e.spot[at])}${settled}${whyOf(e, at)}: ${cashOf(e, at).told}`;
};

function dividendText(e, at) {
  const { cash, told } = cashOf(e, at);
  return `${sizeText(e.quantity[at])} shares of ${e.symbol} ${cash >= 0 ? "earned" : "owed"} a dividend of ${number(e.price[at], 4)} a share: ${told}`;
}

// In the order of the kinds of `kernels/layout.py`.
const TELLERS = [
  (e, at) => `The account opens with ${cashOf(e, at).told}`,
  (e, at) => `Position ${e.position} in ${e.symbol} is opened${whyOf(e, at)}`,
  dealt((e, at) => `${sizeText(e.quantity[at])} shares of ${e.symbol}`),
  dealt(optionText),
  (e, at) => `${optionText(e, at)} ended worthless with the stock at ${number(e.spot[at])}`,
  delivered("exercised"),
  delivered("assigned"),
  dividendText,
  (e, at) => `${e.symbol} was split, ${Number(e.quantity[at].toPrecision(6))} new shares for one old`,
  (e, at) => `Interest on cash: ${cashOf(e, at).told}`,
  (e, at) => `Cost of borrowing shares of ${e.symbol}: ${cashOf(e, at).told}`,
  (e, at) => `The leg \`${legWord(e, at)}\` of ${e.symbol} was left as it is: ${reasonOf(e, at)}`,
  (e, at) => `At the close, an order for ${e.symbol} was decided: ${reasonOf(e, at)}`,
  (e, at) => `Position ${e.position} in ${e.symbol} is over${whyOf(e, at)}: result ${number(e.price[at], 2, true)}`,
  (e) => `${e.symbol} has had no price for 5 sessions`,
  (e, at) => `Equity is ${number(e.price[at])} short of the maintenance margin`,
];
