// Reading the page's data, making elements, writing figures as the rest of the house writes them.

const MISSING = -2147483648;
const byId = (id) => document.getElementById(id);

function dress(node, attributes, children) {
  for (const [name, value] of Object.entries(attributes)) {
    if (name.startsWith("on")) node.addEventListener(name.slice(2), value);
    else if (value !== null && value !== undefined && value !== false) node.setAttribute(name, value);
  }
  node.append(...children.filter((child) => child !== null));
  return node;
}

const make = (name, attributes = {}, ...children) => dress(document.createElement(name), attributes, children);
const draw = (name, attributes = {}, ...children) =>
  dress(document.createElementNS("http://www.w3.org/2000/svg", name), attributes, children);

async function inflated(text) {
  const packed = atob(text);
  const bytes = new Uint8Array(packed.length);
  for (let at = 0; at < packed.length; at += 1) bytes[at] = packed.charCodeAt(at);
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate"));
  return new Uint8Array(await new Response(stream).arrayBuffer());
}

// The inverse of `report/pack.py`: byte planes, folded differences, whole multiples of a step; NaN is unknown.
async function column(packed) {
  const count = packed.n, planes = await inflated(packed.z), values = new Float64Array(count);
  const parts = packed.step < 1 ? Math.round(1 / packed.step) : 0;
  let running = 0;
  for (let at = 0; at < count; at += 1) {
    const folded = planes[at] | (planes[count + at] << 8) | (planes[2 * count + at] << 16) | (planes[3 * count + at] << 24);
    running = (running + ((folded >>> 1) ^ -(folded & 1))) | 0;
    values[at] = running === MISSING ? NaN : parts ? running / parts : running * packed.step;
  }
  return values;
}

async function columns(table) {
  const read = async ([name, packed]) => {
    if (packed && packed.codes) return [name, { words: packed.words, codes: await column(packed.codes) }];
    return [name, packed && packed.z !== undefined && packed.n !== undefined ? await column(packed) : packed];
  };
  return Object.fromEntries(await Promise.all(Object.entries(table).map(read)));
}

function number(value, places = 2, signed = false) {
  if (!Number.isFinite(value)) return "-";
  const [whole, rest] = Math.abs(value).toFixed(places).split(".");
  const text = whole.replace(/\B(?=(\d{3})+$)/g, ",") + (rest ? `.${rest}` : "");
  const nothing = !/[1-9]/.test(text);
  return (value < 0 && !nothing ? "-" : signed && !nothing ? "+" : "") + text;
}

const percent = (value, places = 1, signed = false) =>
  Number.isFinite(value) ? `${number(value * 100, places, signed)}%` : "-";

const dateText = (day) => (Number.isFinite(day) ? new Date(day * 86400000).toISOString().slice(0, 10) : "-");
const monthText = (month) => new Date(Date.UTC(1970, month, 1)).toISOString().slice(0, 7);
const counted = (count, one, many) => `${number(count, 0)} ${count === 1 ? one : many}`;

const HUES = 8;
const hue = (variant) => (variant < 0 ? "c-other" : `c-${variant % HUES}`);
const dash = (variant) => (variant < 0 || variant >= HUES ? " dashed" : "");
const swatch = (variant) => make("i", { class: `swatch ${hue(variant)}${dash(variant)}` });

function choice(label, options, chosen, change) {
  const list = make("select", { onchange: () => change(Number(list.value)) });
  options.forEach((text, at) => list.append(make("option", { value: at }, text)));
  list.value = chosen;
  return make("label", {}, label, list);
}
