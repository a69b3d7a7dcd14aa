// What ruler and loop share: labels of the trips, markers, dimensions, a message, words.

const EDGE = 8, TIP = 8, PITCH = 15, CLEARANCE = 5, GAP = 14, SMALL_MARGIN = 0.02;
const NO_TRIPS = "no trip points with these values";

function supplied(levels) {
  return finite(levels.v_ee, levels.v_cc).length === 2 && levels.v_cc > levels.v_ee;
}

function switches(levels) {
  return levels.ok && finite(levels.lower, levels.upper).length === 2 && supplied(levels);
}

function shortUnit(signal) {
  const unit = signal.unit.split(/\s+/).filter(Boolean).join(" ");
  const letters = Array.from(unit);
  return letters.length <= 10 ? unit : letters.slice(0, 9).join("") + "…";
}

/** With how many digits a trip is written so that the width stays visible in it. */
function tripDigits(value, width) {
  if (!(value && width && Number.isFinite(value) && Number.isFinite(width))) return 4;
  return clamp(tens(value) - tens(width) + 2, 4, 7);
}

/** How many decimals tell both trips apart in the measurand. */
function measurandDecimals(signal, at, lower, upper) {
  const [value, low, high] = [at, lower, upper].map((v) => quantity(signal, v));
  let apart = Math.abs(high - low);
  if (!(Number.isFinite(apart) && apart > 0)) {
    apart = Number.isFinite(value) && value ? Math.abs(value) / 10 : 1;
  }
  return clamp(2 - tens(apart), 0, 7);
}

function inMeasurand(levels, at) {
  const { signal, lower, upper } = levels;
  const places = measurandDecimals(signal, at, lower, upper);
  return `${plain(quantity(signal, at), places)} ${shortUnit(signal)}`.trimEnd();
}

function spanInMeasurand(signal) {
  return `${short(signal.span[0])} to ${short(signal.span[1])} ${shortUnit(signal)}`.trimEnd();
}

function tripLines(levels, trip) {
  const value = levels[trip];
  const first = `${trip} ${written(value, "V", tripDigits(value, levels.width))}`;
  return [first, levels.signal ? inMeasurand(levels, value) : ""];
}

function tripRoom(levels, trip) {
  const [first, second] = tripLines(levels, trip);
  return Math.max(textWidth(first, TEXT, true), textWidth(second, TEXT));
}

function tagStarts(levels, places, width, walls, gap = GAP) {
  const at = { lower: places[0], upper: places[1] };
  const [first, second] = places[0] <= places[1] ? ["lower", "upper"] : ["upper", "lower"];
  const room = tripRoom(levels, first);
  const wants = [
    { start: at[first] + 5 - room, length: room },
    { start: at[second] - 5, length: tripRoom(levels, second) },
  ];
  return place(wants, [EDGE, width - EDGE], { walls, gap, clearance: CLEARANCE });
}

function tripTags(pen, levels, places, baseline, markers, walls = []) {
  const at = { lower: places[0], upper: places[1] };
  const names = places[0] <= places[1] ? ["lower", "upper"] : ["upper", "lower"];
  const starts = tagStarts(levels, places, pen.width, walls)
    || tagStarts(levels, places, pen.width, [], 8)
    || tagStarts(levels, places, Infinity, [], 8) || [];
  const bottom = baseline + 3 + (levels.signal ? PITCH : 0);
  const half = Math.abs(places[1] - places[0]) < 10;
  names.forEach((trip, k) => {
    const start = starts[k], align = k ? "start" : "end", room = tripRoom(levels, trip);
    const x = align === "end" ? start + room : start;
    const [first, second] = tripLines(levels, trip);
    pen.text(`${trip} title`, x, baseline, first, align);
    pen.text(`${trip} letters`, x, baseline + PITCH, second, align);
    const near = clamp(at[trip], start + 5, start + room - 5);
    pen.line(`${trip} lead`, at[trip], markers - 4, near, bottom);
    tripMarker(pen, trip, at[trip], markers, half);
  });
}

/** Two trips closer than a marker show the outer half of each. */
function tripMarker(pen, trip, x, y, half) {
  const [tipY, base] = trip === "upper" ? [y - 5, y + 5] : [y + 5, y - 5];
  const left = half && trip === "upper" ? x : x - 5;
  const right = half && trip === "lower" ? x : x + 5;
  pen.shape(`${trip} mark`, [[left, base], [right, base], [x, tipY]]);
}

function levelMarker(pen, name, x, y) {
  const look = name === "output_high" ? "filled" : "hollow";
  if (name === "reference") {
    pen.shape(look, [[x - 4, y - 4], [x + 4, y - 4], [x + 4, y + 4], [x - 4, y + 4]]);
  } else {
    pen.shape(look, [[x - 5.5, y], [x, y - 5.5], [x + 5.5, y], [x, y + 5.5]]);
  }
}

/** Draw a distance: arrows inside where there is room, else outside. */
function dimension(pen, look, left, right, y, { reach = null, cut: free = null } = {}) {
  const inside = right - left >= 2 * TIP + 6;
  let pieces = inside && free ? [[left, free[0]], [free[1], right]] : [[left, right]];
  if (!inside) pieces = [[left - 16, left], [right, right + 16]];
  if (reach !== null) pieces.push(reach < left ? [reach, left] : [right, reach]);
  for (const [start, end] of pieces) pen.line(`${look} shaft`, start, y, end, y);
  for (const [x, out] of [[left, -1], [right, 1]]) arrowTip(pen, look, x, y, inside ? out : -out, 0);
}

function arrowTip(pen, look, x, y, along, down, size = TIP) {
  const half = 0.38 * size, backX = x - along * size, backY = y - down * size;
  pen.shape(`${look} tip`, [
    [x, y], [backX + down * half, backY + along * half], [backX - down * half, backY - along * half],
  ]);
}

function drawMessage(pen, text, baseline) {
  const room = pen.width - 4 * EDGE;
  const words = `! ${text}`.split(/\s+/).filter(Boolean);
  let line = words.shift();
  while (words.length && textWidth(`${line} ${words[0]}`, TEXT) <= room) {
    line = `${line} ${words.shift()}`;
  }
  [line, cut(words.join(" "), room, TEXT)].forEach((each, row) => {
    pen.text("warning letters", pen.width / 2, baseline + PITCH * row, each, "middle");
  });
}

/** The smallest margin to the common-mode range, null where there is none to draw. */
function nearestMargin(levels) {
  if (!levels.common_mode || !levels.pins || !switches(levels)) return null;
  const [low, high] = levels.common_mode, [least, most] = levels.pins;
  const pairs = [[least - low, least, low], [high - most, most, high]];
  const drawable = pairs.filter((pair) => finite(...pair).length === 3);
  if (!drawable.length) return null;
  const [value, pin, limit] = drawable.reduce((a, b) => (b[0] < a[0] ? b : a));
  return { value, pin, limit, small: value < SMALL_MARGIN * (levels.v_cc - levels.v_ee) };
}

// -- in words -------------------------------------------------------------------------------

function tripsInWords(levels) {
  if (!levels.ok || Number.isNaN(levels.width)) {
    return levels.message.replace(/\.+$/, "") || "no trip points";
  }
  const parts = ["lower", "upper"].map((trip) => {
    const [first, second] = tripLines(levels, trip);
    const span = levels[`${trip}_interval`];
    return first.replace(trip, `${trip} trip`) + (second ? ` (${second})` : "")
      + (span ? ` within ${writtenSpan(...span)}` : "");
  });
  parts.push(`width ${written(levels.width, "V", 3)}`);
  return [...parts, levels.not_evaluated].filter(Boolean).join(", ");
}

function rulerInWords(levels) {
  const parts = [
    `Volt axis with V_EE at ${written(levels.v_ee)} and V_CC at ${written(levels.v_cc)}`,
    tripsInWords(levels),
  ];
  if (finite(levels.output_low, levels.output_high).length === 2) {
    parts.push(`output ${writtenSpan(levels.output_low, levels.output_high)}`);
  }
  if (levels.reference !== null) parts.push(`reference ${written(levels.reference)}`);
  if (levels.common_mode) parts.push(`common-mode range ${writtenSpan(...levels.common_mode)}`);
  const margin = nearestMargin(levels);
  if (margin) parts.push(`margin of the input pins ${written(margin.value, "V", 3)}`);
  return parts.join("; ") + ".";
}

function loopInWords({ axis, levels }) {
  return `Output against signal from ${writtenSpan(...axis)}; ${tripsInWords(levels)}; `
    + `output high ${written(levels.output_high)}, low ${written(levels.output_low)}.`;
}
