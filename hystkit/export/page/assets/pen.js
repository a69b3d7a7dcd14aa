// Marks of a picture as plain data, scales and the placing of labels: twins of the Python side.

const SVG = "http://www.w3.org/2000/svg";
const TEXT = 12.5, SMALL = 11.5, BOLD = 1.13, INDEX = 0.74, LOWERED = 0.32, SPACE = 4;

function textWidth(text, size = SMALL, bold = false) {
  let hundredths = 0;
  for (const character of text) {
    const place = character.codePointAt(0) - 32;
    const inside = place >= 0 && place < TABLES.advances.length;
    const sign = own(TABLES.signs, character) ? TABLES.signs[character] : 100;
    hundredths += inside ? TABLES.advances[place] : sign;
  }
  return (hundredths / 100) * size * (bold ? BOLD : 1);
}

function splitSymbol(name) {
  const together = name.replace("_", "");
  return [together.slice(0, 1), together.slice(1)];
}

function symbolWidth(name, tail = "", size = SMALL) {
  const [base, index] = splitSymbol(name);
  const after = tail ? SPACE + textWidth(tail, size) : 0;
  return textWidth(base, size) + textWidth(index, size * INDEX) + after;
}

/** End a text with an ellipsis where it does not fit. */
function cut(text, room, size = SMALL) {
  let kept = Array.from(text.split(/\s+/).filter(Boolean).join(" "));
  if (textWidth(kept.join(""), size) <= room) return kept.join("");
  while (kept.length && textWidth(kept.join("") + "…", size) > room) {
    kept = Array.from(kept.slice(0, -1).join("").trimEnd());
  }
  return kept.join("") + "…";
}

class Pen {
  constructor(width, height = 0) {
    this.width = width;
    this.height = height;
    this.marks = [];
  }

  add(kind, look, places, texts = []) {
    this.marks.push([kind, look, places.map((x) => Math.floor(x * 100 + 0.5) / 100), texts]);
  }

  line(look, x0, y0, x1, y1) { this.add("line", look, [x0, y0, x1, y1]); }

  box(look, left, top, right, bottom) {
    this.add("rect", look, [left, top, right - left, bottom - top]);
  }

  shape(look, points) { this.add("polygon", look, points.flat()); }

  trace(look, points) { this.add("polyline", look, points.flat()); }

  text(look, x, y, text, align = "start") {
    if (text) this.add("text", look, [x, y], [align, text]);
  }

  symbol(look, x, y, name, tail = "") {
    this.add("symbol", look, [x, y], [...splitSymbol(name), tail]);
  }

  upright(look, x, y, text) { this.add("upright", look, [x, y], [text]); }

  /** The picture as an svg element. */
  svg(label, look) {
    const root = element("svg", {
      class: "hk-" + look, viewBox: `0 0 ${tidy(this.width)} ${tidy(this.height)}`,
      role: "img", "aria-label": label,
    });
    for (const mark of this.marks) root.append(drawn(mark));
    return root;
  }
}

function element(tag, attributes, text) {
  const made = document.createElementNS(SVG, tag);
  for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, value);
  if (text !== undefined) made.textContent = text;
  return made;
}

function tidy(value) {
  return String(Number(value.toFixed(2)));
}

const PLACES = { line: ["x1", "y1", "x2", "y2"], rect: ["x", "y", "width", "height"] };

function drawn([kind, look, places, texts]) {
  const attributes = { class: look.split(" ").map((name) => "hk-" + name).join(" ") };
  if (kind in PLACES) {
    PLACES[kind].forEach((name, k) => { attributes[name] = tidy(places[k]); });
    return element(kind, attributes);
  }
  if (kind === "polygon" || kind === "polyline") {
    return element(kind, { ...attributes, points: places.map(tidy).join(" ") });
  }
  const [x, y] = places.map(tidy);
  if (kind === "upright") {
    const turned = { "text-anchor": "middle", transform: `translate(${x} ${y}) rotate(-90)` };
    return element("text", { ...attributes, ...turned }, texts[0]);
  }
  if (kind === "symbol") {
    const made = element("text", { ...attributes, x, y });
    made.append(...symbolSpans(...texts));
    return made;
  }
  const anchor = texts[0] === "start" ? {} : { "text-anchor": texts[0] };
  return element("text", { ...attributes, x, y, ...anchor }, texts[1]);
}

function symbolSpans(base, index, tail) {
  const spans = [element("tspan", { class: "hk-letter" }, base)];
  if (index) spans.push(element("tspan", { class: "hk-index", dy: LOWERED + "em" }, index));
  if (tail) {
    const back = index ? { dy: `-${tidy(LOWERED * INDEX)}em` } : {};
    spans.push(element("tspan", { dx: String(SPACE), ...back }, tail));
  }
  return spans;
}

// -- scales ---------------------------------------------------------------------------------

class Scale {
  constructor(low, high, start, end) {
    Object.assign(this, { low, high, start, end });
  }

  px(value) {
    return this.start + ((value - this.low) / (this.high - this.low)) * (this.end - this.start);
  }

  inside(value) { return this.px(clamp(value, this.low, this.high)); }
}

function stepFor(span, intervals) {
  const least = span / Math.max(intervals, 1);
  const power = 10 ** tens(least);
  return [1, 2, 5, 10].find((factor) => factor * power >= least * (1 - 1e-9)) * power;
}

function ticks(low, high, step) {
  const first = Math.ceil(low / step - 1e-9), last = Math.floor(high / step + 1e-9);
  const made = [];
  for (let k = first; k <= last; k += 1) made.push(Number((k * step).toPrecision(12)));
  return made;
}

function tickNumber(value, step) {
  return plain(value, Math.max(0, -Math.floor(Math.log10(step) + 1e-9)));
}

function roundness(value, step) {
  const multiple = Math.round(value / step);
  if (multiple === 0) return 3;
  return multiple % 10 ? [2, 5].filter((k) => multiple % k === 0).length : 2;
}

function outward(low, high, grain) {
  const first = Math.floor(low / grain + 1e-9) * grain;
  const last = Math.ceil(high / grain - 1e-9) * grain;
  return [Number(first.toPrecision(12)), Number(last.toPrecision(12))];
}

// -- labels in a row ------------------------------------------------------------------------

function centred(at, length) {
  return { start: at - length / 2, length };
}

/** Place labels in their order, each near where it wants to stand; null if they do not fit. */
function place(wants, row, { walls = [], gap = 0, clearance = 0 } = {}) {
  if (!wants.length) return [];
  const spans = freeSpans(row, walls, clearance);
  let best = null;
  for (const choice of choices(spans.length, wants.length)) {
    const starts = filled(wants, choice, spans, gap);
    if (!starts) continue;
    const cost = starts.reduce((sum, s, k) => sum + (s - wants[k].start) ** 2, 0);
    if (!best || cost < best.cost - 1e-9) best = { cost, starts };
  }
  return best && best.starts;
}

function freeSpans(row, walls, clearance) {
  const spans = [];
  let start = row[0];
  for (const wall of [...walls].sort((a, b) => a - b)) {
    const end = Math.min(wall - clearance, row[1]);
    if (end > start) spans.push([start, end]);
    start = Math.max(start, wall + clearance);
  }
  if (row[1] > start) spans.push([start, row[1]]);
  return spans;
}

/** All ascending ways to give each of `count` labels one of `size` spans. */
function choices(size, count, from = 0) {
  if (count === 0) return [[]];
  const found = [];
  for (let first = from; first < size; first += 1) {
    for (const rest of choices(size, count - 1, first)) found.push([first, ...rest]);
  }
  return found;
}

function filled(wants, choice, spans, gap) {
  const starts = [];
  for (const index of [...new Set(choice)]) {
    const group = wants.filter((_, k) => choice[k] === index);
    const placed = spreadOut(group, spans[index], gap);
    if (!placed) return null;
    starts.push(...placed);
  }
  return starts;
}

function spreadOut(wants, row, gap = 0) {
  const offsets = [0];
  for (const want of wants.slice(0, -1)) {
    offsets.push(offsets[offsets.length - 1] + want.length + gap);
  }
  const last = wants.length ? wants[wants.length - 1].length : 0;
  const slack = row[1] - row[0] - offsets[offsets.length - 1] - last;
  if (slack < 0) return null;
  const free = wants.map((want, k) => want.start - offsets[k]);
  return ascending(free).map((start, k) => clamp(start, row[0], row[0] + slack) + offsets[k]);
}

/** The ascending sequence nearest to the values. */
function ascending(values) {
  const pools = [];
  for (const value of values) {
    let total = value, count = 1;
    while (pools.length) {
      const [earlier, many] = pools[pools.length - 1];
      if (!(earlier / many > total / count)) break;
      pools.pop();
      total += earlier;
      count += many;
    }
    pools.push([total, count]);
  }
  return pools.flatMap(([total, count]) => Array(count).fill(total / count));
}

/** Which labels to keep where each stands at its own place or not at all. */
function thinned(spans, order, { taken = [], gap = 0 } = {}) {
  const used = [...taken], kept = [];
  for (const k of order) {
    const [start, end] = spans[k];
    if (used.every(([low, high]) => end + gap <= low || high + gap <= start)) {
      used.push(spans[k]);
      kept.push(k);
    }
  }
  return kept.sort((a, b) => a - b);
}

/** Indices of ticks, the roundest first. */
function roundestFirst(values, step) {
  return values.map((_, k) => k).sort(
    (a, b) => roundness(values[b], step) - roundness(values[a], step) || a - b,
  );
}
