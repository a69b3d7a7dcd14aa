// Engineering numbers, read and written by the rules of the Python side, whose tables they use.

const MINUS = "\u2212", DASH = "\u2014";
const NOTHING = 1e-13;
const NUMBER = /^([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+))(?:[eE]([+-]?[0-9]{1,9}))?\s*(.*)$/u;
const LETTER_CODE = /^([+-]?[0-9]*)(\p{L})([0-9]+)\s*(.*)$/u;

function own(table, key) {
  return Object.prototype.hasOwnProperty.call(table, key);
}

/** The number that a text stands for in a unit, NaN if it stands for none. */
function read(text, unit) {
  const known = TABLES.units[unit];
  const plain = text.trim().replaceAll(MINUS, "-");
  const number = NUMBER.exec(plain);
  if (number && own(known.suffixes, number[3])) {
    return assembled(number[1], Number(number[2] || 0) + known.suffixes[number[3]]);
  }
  const coded = LETTER_CODE.exec(plain);
  if (coded && own(known.marks, coded[2])) {
    const letterIsUnit = known.names.includes(coded[2]);
    if (coded[4] === "" || (!letterIsUnit && known.names.includes(coded[4]))) {
      return assembled(coded[1] + "." + coded[3], known.marks[coded[2]]);
    }
  }
  return NaN;
}

function assembled(digits, exponent) {
  const value = Number(digits + "e" + exponent);
  const vanished = value === 0 && /[1-9]/.test(digits);
  return vanished || !Number.isFinite(value) ? NaN : value;
}

/** A tolerance as a fraction; a bare number counts per cent, as the field is headed. */
function readTolerance(text) {
  let typed = text.trim().replace(/^±/, "").trim();
  if (typed === "") return 0;
  if (own(TABLES.tolerances, typed)) return TABLES.tolerances[typed];
  if (/[0-9.]$/.test(typed)) typed += "%";
  return read(typed, "%");
}

/** Decimal digits of a number and the power of ten of the first one; exact. */
function decimals(value) {
  const [mantissa, exponent] = Math.abs(value).toExponential(100).split("e");
  return { digits: mantissa.replace(".", ""), exponent: Number(exponent) };
}

/** Round to so many digits, ties to even. */
function roundDigits(number, keep) {
  let { digits, exponent } = number;
  if (keep < 0) return { digits: "0", exponent: 0 };
  const head = digits.slice(0, keep).split("").map(Number);
  const rest = digits.slice(keep);
  const tie = /^50*$/.test(rest);
  const odd = keep > 0 && head[keep - 1] % 2 === 1;
  if (rest[0] > "5" || (rest[0] === "5" && (!tie || odd))) {
    let place = keep - 1;
    while (place >= 0 && head[place] === 9) head[place--] = 0;
    if (place >= 0) head[place] += 1;
    else {
      head.unshift(1);
      exponent += 1;
    }
  }
  const text = head.join("");
  return /[1-9]/.test(text) ? { digits: text, exponent } : { digits: "0", exponent: 0 };
}

/** Write digits without exponent and without trailing zeros. */
function positional(digits, exponent) {
  const kept = digits.replace(/0+$/, "");
  if (kept === "") return "0";
  if (exponent < 0) return "0." + "0".repeat(-exponent - 1) + kept;
  if (kept.length <= exponent + 1) return kept + "0".repeat(exponent + 1 - kept.length);
  return kept.slice(0, exponent + 1) + "." + kept.slice(exponent + 1);
}

/** A number with its unit and an SI prefix, to be read back. */
function show(value, unit, digits = 4) {
  if (Number.isNaN(value)) return DASH;
  if (!Number.isFinite(value)) return ((value > 0 ? "∞ " : "-∞ ") + unit).trimEnd();
  const known = TABLES.units[unit];
  const rounded = roundDigits(decimals(value), digits);
  const scales = Object.keys(known.shown).map(Number);
  const below = scales.filter((scale) => scale <= rounded.exponent);
  const scale = below.length ? Math.max(...below) : Math.min(...scales);
  const exponent = rounded.digits === "0" ? 0 : rounded.exponent - scale;
  const sign = value < 0 && rounded.digits !== "0" ? "-" : "";
  const text = exponent > -5 && exponent < 9
    ? positional(rounded.digits, exponent)
    : positional(rounded.digits, 0) + "e" + exponent;
  return (sign + text + " " + known.shown[scale]).trimEnd();
}

/** A resistance in the letter code of IEC 60062. */
function code(ohms, digits = 4) {
  const rounded = roundDigits(decimals(ohms), digits);
  const letters = { 0: "R", 3: "k", 6: "M", 9: "G", 12: "T" };
  const fit = Object.keys(letters).map(Number).filter((scale) => scale <= rounded.exponent);
  const scale = Math.max(0, ...fit);
  const exponent = rounded.digits === "0" ? 0 : rounded.exponent - scale;
  const [whole, fraction = ""] = positional(rounded.digits, exponent).split(".");
  return (whole === "0" && fraction ? "" : whole) + letters[scale] + fraction;
}

/** A value as it stands beside a mark, with a true minus sign. */
function written(value, unit = "V", digits = 4) {
  return show(Math.abs(value) < NOTHING ? 0 : value, unit, digits).replace(/^-/, MINUS);
}

function prefixFor(low, high, unit) {
  const largest = Math.max(Math.abs(low), Math.abs(high));
  const prefixes = [[1e9, "G"], [1e6, "M"], [1e3, "k"], [1, ""], [1e-3, "m"], [1e-6, "µ"]];
  for (const [factor, prefix] of prefixes) {
    if (largest >= factor * (1 - 1e-9)) return [factor, prefix + unit];
  }
  return largest < NOTHING ? [1, unit] : [1e-9, "n" + unit];
}

function writtenSpan(low, high, unit = "V") {
  const [factor, prefixed] = prefixFor(low, high, unit);
  return `${short(low / factor)} to ${short(high / factor)} ${prefixed}`;
}

function short(value) {
  return general(Math.abs(value) >= 5e-4 ? value : 0, 4).replace("-", MINUS);
}

/** The shorter of fixed and exponential notation, as C writes it with %g. */
function general(value, digits) {
  if (Number.isNaN(value)) return "nan";
  const rounded = roundDigits(decimals(value), digits);
  const sign = value < 0 ? "-" : "";
  const { exponent } = rounded;
  if (exponent >= -4 && exponent < digits) return sign + positional(rounded.digits, exponent);
  const power = String(Math.abs(exponent)).padStart(2, "0");
  return `${sign}${positional(rounded.digits, 0)}e${exponent < 0 ? "-" : "+"}${power}`;
}

/** A number with so many decimals, ties to even. */
function fixed(value, places) {
  const number = decimals(value);
  const rounded = roundDigits(number, number.exponent + 1 + places);
  const [whole, fraction = ""] = positional(rounded.digits, rounded.exponent).split(".");
  const sign = value < 0 ? "-" : "";
  return sign + whole + (places ? "." + fraction.padEnd(places, "0") : "");
}

function plain(value, places) {
  if (!Number.isFinite(value)) return DASH;
  const long = Math.abs(value) >= 1e6 || places > 7;
  const text = long ? general(value, 4) : fixed(value, places);
  return Number(text) === 0 ? text.replace(/^-+/, "") : text.replaceAll("-", MINUS);
}

/** The power of ten of the first digit. */
function tens(value) {
  return Number(Math.abs(value).toExponential().split("e")[1]);
}

function clamp(value, low, high) {
  return Math.min(Math.max(value, low), high);
}
