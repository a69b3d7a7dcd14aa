// One row of the controls: a slider over steps, a typed value and a tolerance.

/** Preferred values from a decade below to a decade above a value. */
function preferredSteps(series, middle) {
  const digits = TABLES.series[series], made = [];
  const decade = tens(clamp(middle, 1e-6, 1e15));
  for (let power = decade - 2; power <= decade + 2; power += 1) {
    for (const step of digits) {
      const value = Number(`${step}e${power + 1 - String(step).length}`);
      if (value >= middle / 10.001 && value <= middle * 10.001) made.push(value);
    }
  }
  return made;
}

/** Round voltages in some two hundred steps; `reach` is the range that is wanted at least. */
function evenSteps(low, high) {
  const step = stepFor(high - low, 240), made = [];
  const last = Math.ceil(high / step - 1e-9);
  for (let k = Math.floor(low / step + 1e-9); k <= last; k += 1) {
    made.push(Number((k * step).toPrecision(12)));
  }
  return made;
}

function nearestStep(steps, value) {
  let best = 0;
  steps.forEach((step, k) => {
    if (Math.abs(step - value) < Math.abs(steps[best] - value)) best = k;
  });
  return best;
}

const DEVICE_UNITS = { r_high: "Ω", r_low: "Ω", leakage: "A", bias_plus: "A", bias_minus: "A" };
const SIGNED = ["offset", "bias_plus", "bias_minus", "leakage", "common_mode_low", "common_mode_high"];

function unitOf(name) {
  return name.startsWith("R") ? "Ω" : DEVICE_UNITS[name] || "V";
}

function isDevice(name) {
  return name === name.toLowerCase();
}

/** Text that reads back as the very same number. */
function exactText(name, value) {
  if (value === null) return "";
  const unit = unitOf(name);
  const coded = name.startsWith("R") && value >= 0;
  const text = coded ? code(value, 12) : show(value, unit, 12);
  return read(text, unit) === value ? text : String(value);
}

/** What is wrong with a typed text, and what to write in its place. */
function hint(text, unit) {
  const example = { "Ω": "4k7 or 4.7 kΩ", V: "2.5 or 2.5 V", A: "25n or 25 nA", "%": "1 or 1 %" };
  const typed = text.trim();
  if (!typed) return `empty: write ${example[unit]}`;
  const pointed = typed.replace(",", ".");
  if (pointed !== typed && !Number.isNaN(read(pointed, unit))) {
    return `a point for decimals: ${pointed}`;
  }
  return `not read as a number here: write ${example[unit]}`;
}

class Row {
  constructor(live, root) {
    this.live = live;
    this.root = root;
    this.name = root.dataset.name;
    this.unit = unitOf(this.name);
    this.slider = root.querySelector("input[type=range]");
    this.field = root.querySelector(".hk-value");
    this.tolerance = root.querySelector(".hk-tolerance");
    this.auto = root.querySelector("[data-do=auto]");
    this.fault = root.querySelector(".hk-fault");
    this.fault.id = live.freshId();
    this.steps = [];
    this.listen();
  }

  listen() {
    if (this.slider) this.slider.addEventListener("input", () => this.slid());
    this.entry(this.field, (text) => this.typed(text));
    if (this.tolerance) this.entry(this.tolerance, (text) => this.typedTolerance(text));
    if (this.auto) {
      this.auto.addEventListener("click", () => {
        this.live.change({ value: { [this.name]: null } });
        this.field.focus();
      });
    }
  }

  /** Take an entry when it is finished; Escape gives the old one back. */
  entry(field, take) {
    field.setAttribute("aria-describedby", this.fault.id);
    field.addEventListener("change", () => {
      const fault = take(field.value);
      this.say(field, fault || "");
    });
    field.addEventListener("keydown", (event) => {
      if (event.key !== "Escape") return;
      this.say(field, "");
      this.show();
    });
  }

  say(field, fault) {
    for (const one of [this.field, this.tolerance]) if (one) one.removeAttribute("aria-invalid");
    if (fault) field.setAttribute("aria-invalid", "true");
    this.fault.textContent = fault;
    this.fault.hidden = !fault;
  }

  get faulty() { return !this.fault.hidden; }

  typed(text) {
    const value = this.read(text);
    if (typeof value === "string") return value;
    this.steps = [];
    this.live.change({ value: { [this.name]: value } });
    return "";
  }

  /** The value that a text stands for, or what is wrong with it. */
  read(text) {
    const { form } = this.live, name = this.name;
    if (!text.trim()) {
      if (form.levels.includes(name) && name !== "V_REF") return null;
      if (isDevice(name)) return unstated(name);
    }
    const value = read(text, this.unit);
    if (Number.isNaN(value)) return hint(text, this.unit);
    return usable(form, name, value) || value;
  }

  typedTolerance(text) {
    const value = readTolerance(text);
    if (Number.isNaN(value)) return hint(text, "%");
    if (!(value >= 0 && value < 1)) return "a tolerance is from 0 to below 100 %";
    const level = this.live.state.value[this.name] === null;
    if (level && value) return `${this.name} follows; give it a value first`;
    this.live.change({ tol: { [this.name]: value } });
    return "";
  }

  slid() {
    const value = this.value, before = nearestStep(this.steps, value);
    let at = Number(this.slider.value);
    // Off the steps, a single step leads to the next one in that direction.
    if (at === before + 1 && this.steps[before] > value) at = before;
    if (at === before - 1 && this.steps[before] < value) at = before;
    this.say(this.field, "");
    this.live.change({ value: { [this.name]: this.steps[at] } });
  }

  /** The value in force, given or followed. */
  get value() {
    const { form, state } = this.live;
    return state.value[this.name] ?? followed(form, this.name, state.value);
  }

  show() {
    const given = this.live.state.value[this.name];
    if (!this.faulty) {
      this.field.value = exactText(this.name, given);
      if (this.tolerance) {
        const tol = this.live.state.tol[this.name] || 0;
        this.tolerance.value = tol ? show(tol, "%", 12).replace(" %", "") : "";
      }
    }
    if (given === null && this.auto) this.field.placeholder = show(this.value, this.unit);
    if (this.auto) this.auto.hidden = given === null;
    if (this.slider) this.showSlider();
  }

  showSlider() {
    const value = this.value, steps = this.steps;
    if (!steps.length || value < steps[0] || value > steps[steps.length - 1]) this.rescale();
    this.slider.min = 0;
    this.slider.max = this.steps.length - 1;
    this.slider.value = nearestStep(this.steps, value);
    this.slider.setAttribute("aria-valuetext", show(value, this.unit));
  }

  /** Lay the steps anew; while the value is among them they stay under the hand. */
  rescale() {
    if (this.unit === "Ω") {
      this.steps = preferredSteps(this.live.series, this.value);
      return;
    }
    const { form, first } = this.live, low = form.split ? first.value.V_EE : 0;
    const high = first.value.V_CC, swing = high - low;
    const ends = { V_CC: [low < 0 ? 0 : 0.1 * high, 2 * high], V_EE: [2 * low, 0],
      V_PU: [low, high + swing] }[this.name] || [low, high];
    this.steps = evenSteps(Math.min(ends[0], this.value), Math.max(ends[1], this.value));
  }
}

/** What is wrong with a number as the value of this name; "" where nothing is. */
function usable(form, name, value) {
  if (form.parts.includes(name) && !(value > 0)) return "a resistance is above zero";
  if (isDevice(name) && value < 0 && !SIGNED.includes(name)) return "the magnitude is meant: 0 or more";
  const limits = own(form.limits, name) ? form.limits[name] : null;
  if (limits && (value < limits[0] || value > limits[1])) {
    const [low, high] = limits.map((end) => show(end, unitOf(name)));
    return `outside its limits, ${low} to ${high}`;
  }
  return "";
}
