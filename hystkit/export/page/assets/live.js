// The page comes alive: controls, pictures, tables and the link follow one state.

const TRIP_NAMES = ["upper", "lower", "width", "middle"];
const NON_IDEAL = ["R_OH", "R_OL", "I_LK", "V_OS", "I_BP", "I_BN"];
const ANNOUNCE_AFTER = 500, LINK_AFTER = 400;

class Live {
  constructor(root, number) {
    this.root = root;
    this.key = FORM + (number ? `.${number + 1}` : "");
    const data = JSON.parse(root.querySelector(".hk-data").textContent);
    this.form = data.form;
    this.first = data.state;
    this.state = copied(data.state);
    this.series = "E96";
    this.rows = [...root.querySelectorAll(".hk-row")].map((row) => new Row(this, row));
    this.takeLink();
    this.listen();
    for (const hidden of root.querySelectorAll("[data-live]")) hidden.hidden = false;
    this.show();
    this.watch();
  }

  freshId() {
    document.hkIds = (document.hkIds || 0) + 1;
    return `hk-id-${document.hkIds}`;
  }

  find(selector) { return this.root.querySelector(selector); }

  listen() {
    const actions = {
      link: () => this.copy(this.link(), "link copied"),
      reset: () => this.reset(),
      latex: () => this.copy(this.find(".hk-latex").textContent, "LaTeX copied"),
    };
    for (const [name, action] of Object.entries(actions)) {
      const button = this.find(`[data-do=${name}]`);
      if (button) button.addEventListener("click", action);
    }
    const series = this.find(".hk-series");
    series.addEventListener("change", () => {
      this.series = series.value;
      for (const row of this.rows) row.steps = [];
      this.show();
    });
    // An about: document, as in a cell of a notebook, has no address to copy.
    if (location.protocol === "about:") this.find("[data-do=link]").hidden = true;
  }

  /** Follow the width that there is, the colours around, and the address. */
  watch() {
    new ResizeObserver(() => this.draw()).observe(this.find(".hk-ruler"));
    const dark = matchMedia("(prefers-color-scheme: dark)");
    dark.addEventListener("change", () => this.adoptColours());
    addEventListener("hashchange", () => {
      this.takeLink();
      this.show();
    });
    this.adoptColours();
    // Paper is narrower than most screens, and the pictures follow their width.
    addEventListener("beforeprint", () => this.draw({ ".hk-ruler": 680, ".hk-loop": 330 }));
    addEventListener("afterprint", () => this.draw());
  }

  /** Light letters around the page mean a dark page. */
  adoptColours() {
    const around = getComputedStyle(this.root.parentElement).color.match(/[\d.]+/g).map(Number);
    const light = 0.2126 * around[0] + 0.7152 * around[1] + 0.0722 * around[2] > 140;
    this.root.dataset.theme = light ? "dark" : "light";
  }

  change({ value = {}, tol = {} }) {
    const { state } = this;
    this.state = { value: { ...state.value, ...value }, tol: { ...state.tol, ...tol } };
    for (const [name, given] of Object.entries(value)) {
      if (given === null && own(this.state.tol, name)) delete this.state.tol[name];
    }
    this.show();
    clearTimeout(this.linking);
    this.linking = setTimeout(() => this.putLink(), LINK_AFTER);
  }

  put(state) {
    this.state = copied(state);
    for (const row of this.rows) {
      row.say(row.field, "");
      row.steps = [];
    }
    this.change({});
  }

  reset() {
    this.put(this.first);
    this.say("values as published");
  }

  show() {
    this.levels = evaluate(this.form, this.state);
    this.loop = switchingLoop(this.levels);
    for (const row of this.rows) row.show();
    this.draw();
    this.showSchematic();
    this.showTables();
    this.showLaw();
    clearTimeout(this.announcing);
    this.announcing = setTimeout(() => {
      this.find(".hk-aloud").textContent = tripsInWords(this.levels);
    }, ANNOUNCE_AFTER);
  }

  draw(widths = {}) {
    const pictures = [
      [".hk-ruler", drawRuler, this.levels, rulerInWords],
      [".hk-loop", drawLoop, this.loop, loopInWords],
    ];
    for (const [selector, drawing, data, words] of pictures) {
      const frame = this.find(selector);
      const width = widths[selector] || Math.max(Math.floor(frame.clientWidth), 300);
      frame.replaceChildren(drawing(data, width).svg(words(data), "picture"));
    }
  }

  showSchematic() {
    const { values } = this.levels;
    for (const text of this.root.querySelectorAll("[data-value]")) {
      const name = text.dataset.value;
      text.textContent = this.form.parts.includes(name) ? code(values[name]) : written(values[name]);
    }
  }

  showTables() {
    const cells = tripCells(this.levels);
    for (const cell of this.root.querySelectorAll("[data-cell]")) {
      cell.textContent = cells[cell.dataset.cell];
    }
    const fault = this.find(".hk-impossible");
    fault.hidden = this.levels.ok;
    fault.textContent = this.levels.ok ? "" : `! ${this.levels.message}`;
    for (const row of this.root.querySelectorAll("[data-symbol]")) {
      const name = row.dataset.symbol, value = this.levels.values[name];
      const unit = { R: "Ω", V: "V", I: "A" }[name[0]];
      row.hidden = NON_IDEAL.includes(name) && value === 0;
      const tol = this.state.tol[name === "V_EE" ? "V_CC" : name] || 0;
      row.cells[1].textContent = row.hidden ? "" : written(value, unit);
      row.cells[2].textContent = tol ? `±${show(tol, "%")}` : "";
    }
  }

  /** Say where a device value counts that the law shown leaves out. */
  showLaw() {
    const note = this.find(".hk-left-out");
    if (!note) return;
    const known = note.dataset.knows.split(" ");
    const { values } = this.levels;
    const missing = LAW.trips.names.filter(
      (name) => NON_IDEAL.includes(name) && values[name] !== 0 && !known.includes(name),
    );
    note.hidden = !missing.length;
    note.textContent = missing.length
      ? `Not in these formulas, but in the numbers: ${missing.join(", ")}. See the full law.` : "";
  }

  // -- the link -----------------------------------------------------------------------------

  /** The whole state as text; a level that follows its rail is left out. */
  told() {
    const { value, tol } = this.state, entries = [];
    for (const [name, given] of Object.entries(value)) {
      if (given === null || given === unstated(name)) continue;
      const unit = unitOf(name), coded = unit === "Ω" && given >= 0 ? code(given, 15) : "";
      const text = coded && read(coded, unit) === given ? coded : String(given);
      entries.push(`${name}=${text}${tol[name] ? `~${tol[name]}` : ""}`);
    }
    return `${this.key}/${entries.join("/")}`;
  }

  /** Every part of the address that belongs to another page is kept. */
  fragment() {
    const others = location.hash.slice(1).split(";").filter(
      (part) => part.startsWith("hk") && !part.startsWith(`${this.key}/`),
    );
    return `#${[...others, this.told()].join(";")}`;
  }

  link() {
    return location.href.split("#")[0] + this.fragment();
  }

  putLink() {
    // The anchor of a page around is not ours to change.
    if (location.hash && !location.hash.startsWith("#hk")) return;
    try {
      history.replaceState(history.state, "", this.fragment());
    } catch (error) {
      // A frame without an address of its own: the button still copies.
    }
  }

  takeLink() {
    let text = location.hash.slice(1);
    try {
      text = decodeURIComponent(text);
    } catch (error) {
      return;
    }
    const mine = text.split(";").find((part) => part.startsWith(`${this.key}/`));
    if (!mine || mine === this.told()) return;
    const taken = this.parsed(mine.slice(this.key.length + 1).split("/"));
    if (taken) this.state = taken;
    else this.say("the link holds values that cannot be used; shown as published");
  }

  /** The state that a link describes, null if anything in it is not usable. */
  parsed(entries) {
    const state = { value: {}, tol: {} };
    for (const [name, given] of Object.entries(this.first.value)) {
      const level = this.form.levels.includes(name);
      state.value[name] = isDevice(name) || level ? unstated(name) : given;
    }
    for (const entry of entries) {
      const found = /^(\w+)=([^~]*)(?:~(.*))?$/.exec(entry);
      if (!found || !own(state.value, found[1])) return null;
      const [, name, text, tol] = found;
      const value = read(text, unitOf(name));
      if (Number.isNaN(value) || usable(this.form, name, value)) return null;
      state.value[name] = value;
      if (tol !== undefined) {
        const fraction = Number(tol);
        if (!(fraction >= 0 && fraction < 1)) return null;
        state.tol[name] = fraction;
      }
    }
    const missing = state.value.V_REF === null && this.form.levels.includes("V_REF");
    return missing ? null : state;
  }

  // -- copying ------------------------------------------------------------------------------

  async copy(text, done) {
    const { featurePolicy } = document;
    try {
      // Asked first: where the frame may not, the attempt alone is an error in the console.
      if (featurePolicy && !featurePolicy.allowsFeature("clipboard-write")) throw new Error("not here");
      await navigator.clipboard.writeText(text);
      this.say(done);
    } catch (error) {
      this.say(this.copyBySelection(text) ? done : "press Ctrl+C to copy the text below");
    }
  }

  /** Where a frame may not reach the clipboard: select the text, and leave it if that fails, too. */
  copyBySelection(text) {
    const clip = this.find(".hk-clip");
    clip.hidden = false;
    clip.value = text;
    clip.select();
    let copied = false;
    try {
      copied = document.execCommand("copy");
    } catch (error) {
      copied = false;
    }
    clip.hidden = copied;
    return copied;
  }

  say(text) {
    const said = this.find(".hk-said");
    said.textContent = text;
    clearTimeout(this.saying);
    this.saying = setTimeout(() => { said.textContent = ""; }, 6000);
  }
}

function copied(state) {
  return { value: { ...state.value }, tol: { ...state.tol } };
}

/** What a value is while nothing is said about it. */
function unstated(name) {
  return isDevice(name) && !name.startsWith("common_mode") ? 0 : null;
}

/** What stands in the table of trips. */
function tripCells(levels) {
  const cells = {};
  for (const trip of TRIP_NAMES) {
    const value = levels[trip], span = levels[`${trip}_interval`];
    const known = span && finite(...span).length === 2;
    const digits = trip === "width" ? 4 : tripDigits(value, levels.width);
    cells[`${trip}.volts`] = written(value, "V", digits);
    const missing = trip === "upper" || trip === "lower" ? levels.not_evaluated : "";
    cells[`${trip}.within`] = known ? writtenSpan(...span) : missing;
    cells[`${trip}.measurand`] = levels.signal ? measurandCell(levels, trip) : "";
    // A ratiometric sensor moves with the supply as the trips do: no interval is stated for it.
    const apart = known && levels.signal && !levels.signal.ratiometric;
    cells[`${trip}.range`] = apart ? measurandRange(levels, span) : "";
  }
  return cells;
}

function measurandCell(levels, trip) {
  if (trip !== "width") return inMeasurand(levels, levels[trip]);
  const [lower, upper] = [levels.lower, levels.upper].map((v) => quantity(levels.signal, v));
  const apart = Math.abs(upper - lower);
  const places = apart > 0 && Number.isFinite(apart) ? clamp(2 - tens(apart), 0, 7) : 1;
  return `${plain(apart, places)} ${shortUnit(levels.signal)}`.trimEnd();
}

/** An interval in the measurand, the lower end first. */
function measurandRange(levels, span) {
  const ordered = [...span].sort((a, b) => quantity(levels.signal, a) - quantity(levels.signal, b));
  const { signal, lower, upper } = levels;
  const ends = ordered.map((v) => plain(quantity(signal, v), measurandDecimals(signal, v, lower, upper)));
  return `${ends[0]} to ${ends[1]} ${shortUnit(signal)}`.trimEnd();
}

/** Start every page of this form that has not started yet. */
function start() {
  const all = [...document.querySelectorAll(`.hk-live[data-form="${FORM}"]`)];
  all.forEach((root, number) => {
    if (root.hystkit) return;
    const live = new Live(root, number);
    root.hystkit = {
      state: () => copied(live.state),
      change: (changes) => live.change(changes),
      put: (state) => live.put(state),
      evaluate: (state = live.state) => evaluate(live.form, state),
      told: () => live.told(),
      parsed: (text) => live.parsed(text.split("/").slice(1)),
      read, readTolerance, show, code, written,
      pictures: (ruler, loop, state = live.state) => {
        const levels = evaluate(live.form, state);
        return [drawRuler(levels, ruler), drawLoop(switchingLoop(levels), loop)];
      },
    };
  });
}

if (document.readyState === "loading" && !document.currentScript) {
  document.addEventListener("DOMContentLoaded", start);
} else start();
