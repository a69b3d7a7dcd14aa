// The ruler: everything that must fit together, on one volt axis.

const RULER_SLIM = 560, GUTTER = [62, 128], TICK_GAP = 7;
const LEVEL_ROWS = [["output_low", "V_OL"], ["output_high", "V_OH"], ["reference", "V_REF"]];

function drawRuler(levels, width) {
  return new Ruler(levels, width).drawn();
}

class Ruler {
  constructor(levels, width) {
    this.levels = levels;
    this.slim = width < RULER_SLIM;
    this.pen = new Pen(width);
    this.switches = switches(levels);
    this.message = this.switches ? "" : levels.message || NO_TRIPS;
    this.span = drawable(levels.signal_span);
    this.reach = drawable(levels.common_mode);
    const [low, high] = rulerRange(levels);
    [this.factor, this.unit] = prefixFor(low, high, "V");
    this.heads = [signalHead(levels.signal), "common mode", `voltage / ${this.unit}`];
    this.tails = [
      levels.signal ? cut(spanInMeasurand(levels.signal), GUTTER[1]) : "",
      this.reach ? writtenSpan(...this.reach) : "",
    ];
    this.scale = new Scale(low, high, ...this.ends(width));
    this.rails = supplied(levels) ? [levels.v_ee, levels.v_cc] : [];
    this.walls = this.rails.map((value) => this.scale.px(value));
    this.rows = this.heights();
    this.pen.height = this.rows.bottom + EDGE;
  }

  ends(width) {
    if (this.slim) return [EDGE + 12, width - EDGE - 12];
    const widest = (texts) => clamp(Math.max(...texts.map((text) => textWidth(text))), ...GUTTER);
    return [EDGE + widest(this.heads) + 12, width - EDGE - widest(this.tails) - 12];
  }

  heights() {
    const levels = this.levels;
    let extra = this.slim ? 15 : 0, bar = 53, top = 60;
    if (!levels.signal) {
      extra = 0;
      bar = top = 26;
    }
    const tripNames = top + extra + 17;
    const tripMarkers = tripNames + (levels.signal ? 29 : 14);
    const axis = tripMarkers + 46;
    const below = axis + (this.slim ? 43 : 28);
    const commonMode = below + (this.slim ? 22 : 10);
    const margin = commonMode + 20;
    const reached = this.reach ? margin + 12 : below;
    const levelMarkers = reached + 9;
    const shown = finite(levels.output_high, levels.output_low, levels.reference).length;
    const bottom = shown ? levelMarkers + 25 : reached + 4;
    return {
      measurandHead: 38, measurandNumbers: 41 + extra, spanBar: bar + extra, tripNames,
      tripMarkers, axis, voltNumbers: axis + 20, below, commonHead: below + 10, commonMode, margin,
      levelMarkers, bottom,
    };
  }

  drawn() {
    this.drawShades();
    this.drawRails();
    this.drawVolts();
    this.drawMeasurand();
    this.drawCommonMode();
    this.drawTrips();
    this.drawLevels();
    return this.pen;
  }

  // -- what stays while the trips move ------------------------------------------------------

  drawRails() {
    const names = [this.levels.v_ee === 0 ? "GND" : "V_EE", "V_CC"].slice(0, this.rails.length);
    const wants = names.map((name, k) => centred(
      this.walls[k], name === "GND" ? textWidth(name, TEXT) : symbolWidth(name, "", TEXT),
    ));
    const starts = place(wants, [EDGE, this.pen.width - EDGE], { gap: 8 }) || [];
    starts.forEach((start, k) => {
      if (names[k] === "GND") this.pen.text("letters", start, 18, "GND");
      else this.pen.symbol("letters", start, 18, names[k]);
      for (const [top, end] of this.railPieces(this.walls[k])) {
        this.pen.line("rail", this.walls[k], top, this.walls[k], end);
      }
    });
  }

  /** Stop the rail where it would run through a text. */
  railPieces(x) {
    const rows = this.rows, gaps = [];
    if (this.measurandNumbers().some(([at]) => Math.abs(at - x) < 26)) {
      gaps.push([rows.measurandNumbers - 12, rows.measurandNumbers + 4]);
    }
    if (this.message || this.tagsCross()) gaps.push([rows.tripNames - 14, rows.tripNames + 30]);
    gaps.push([rows.axis + 7, this.slim ? rows.bottom : rows.below]);
    const tops = [24, ...gaps.map((gap) => gap[1])];
    const bottoms = [...gaps.map((gap) => gap[0]), rows.bottom];
    return tops.map((top, k) => [top, bottoms[k]]).filter(([top, end]) => end > top);
  }

  /** Whether the labels of the trips find no room beside the rails. */
  tagsCross() {
    const places = this.tripPlaces();
    return places !== null && !tagStarts(this.levels, places, this.pen.width, this.walls);
  }

  tripPlaces() {
    const { lower, upper } = this.levels;
    return this.switches ? [this.scale.px(lower), this.scale.px(upper)] : null;
  }

  drawVolts() {
    const { pen, scale, factor, rows } = this, y = rows.axis;
    pen.line("axis", scale.start, y, scale.end, y);
    const step = stepFor((scale.high - scale.low) / factor, (scale.end - scale.start) / 62);
    const low = scale.low / factor, high = scale.high / factor;
    for (const value of ticks(low, high, step / 5)) {
      pen.line("minor", scale.px(value * factor), y, scale.px(value * factor), y + 4);
    }
    const values = ticks(low, high, step);
    for (const value of values) {
      pen.line("tick", scale.px(value * factor), y, scale.px(value * factor), y + 7);
    }
    const taken = this.railNumbers(step);
    const texts = values.map((value) => tickNumber(value, step));
    const spans = values.map((value, k) => extent(scale.px(value * factor), texts[k]));
    for (const k of thinned(spans, roundestFirst(values, step), { taken, gap: TICK_GAP })) {
      pen.text("number", scale.px(values[k] * factor), rows.voltNumbers, texts[k], "middle");
    }
    pen.text("head", EDGE, this.slim ? rows.axis + 36 : rows.voltNumbers, this.heads[2]);
  }

  /** Write the numbers at both rails and give what they take of the row. */
  railNumbers(step) {
    const texts = this.rails.map((value) => railNumber(value / this.factor, step));
    const widths = texts.map((text) => textWidth(text));
    const wants = widths.map((width, k) => centred(this.walls[k], width));
    const row = [this.scale.start - 12, this.scale.end + 12];
    const starts = place(wants, row, { gap: TICK_GAP }) || [];
    return starts.map((start, k) => {
      const middle = start + widths[k] / 2;
      this.pen.text("number", middle, this.rows.voltNumbers, texts[k], "middle");
      return [start, start + widths[k]];
    });
  }

  measurandStep() {
    const [low, high] = this.levels.signal.span;
    const room = Math.abs(this.at(high) - this.at(low));
    return stepFor(high - low, Math.max(room / 56, 2));
  }

  /** The numbers of the upper edge and where they stand. */
  measurandNumbers() {
    const signal = this.levels.signal;
    if (!signal) return [];
    const step = this.measurandStep();
    const values = ticks(...signal.span, step);
    const texts = values.map((value) => tickNumber(value, step));
    const spans = values.map((value, k) => extent(this.at(value), texts[k]));
    const taken = [[-Infinity, this.scale.start - 10], [this.scale.end + 10, Infinity]];
    const kept = thinned(spans, roundestFirst(values, step), { taken, gap: TICK_GAP });
    return kept.map((k) => [this.at(values[k]), texts[k]]);
  }

  at(amount) {
    const found = volts(this.levels.signal, amount);
    return Number.isFinite(found) ? this.scale.inside(found) : this.scale.start;
  }

  drawMeasurand() {
    const { pen, rows, span } = this, signal = this.levels.signal;
    if (!signal || !span) return;
    const [left, right] = span.map((end) => this.scale.inside(end));
    pen.box("span", left, rows.spanBar - 2, right, rows.spanBar + 2);
    const step = this.measurandStep(), top = rows.spanBar - 2;
    const minor = step / (step.toExponential(6)[0] === "2" ? 2 : 5);
    for (const [look, each, reach] of [["minor", minor, 4], ["tick", step, 7]]) {
      for (const value of ticks(...signal.span, each)) {
        pen.line(`${look} signal`, this.at(value), top, this.at(value), top - reach);
      }
    }
    for (const [x, text] of this.measurandNumbers()) {
      pen.text("number", x, rows.measurandNumbers, text, "middle");
    }
    if (!this.slim) {
      pen.text("head", EDGE, rows.spanBar + 4, this.heads[0]);
      pen.text("number", this.scale.end + 12, rows.spanBar + 4, this.tails[0]);
      return;
    }
    const text = cut(`${this.heads[0]}, ${this.tails[0]}`, pen.width - 4 * EDGE);
    const want = [{ start: EDGE, length: textWidth(text) }], row = [EDGE, pen.width - EDGE];
    const starts = place(want, row, { walls: this.walls, clearance: CLEARANCE });
    pen.text("head", starts ? starts[0] : EDGE, rows.measurandHead, text);
  }

  drawCommonMode() {
    if (!this.reach) return;
    const { pen, scale } = this, y = this.rows.commonMode;
    const [left, right] = this.reach.map((end) => scale.inside(end));
    pen.box("common", left, y - 5, right, y + 5);
    for (const side of [y - 5, y + 5]) pen.line("common-edge", left, side, right, side);
    for (const end of this.reach) {
      if (scale.low <= end && end <= scale.high) {
        pen.line("common-end", scale.px(end), y - 6, scale.px(end), y + 6);
      }
    }
    const margin = nearestMargin(this.levels);
    this.commonTexts(margin);
    if (margin) this.drawMargin(margin);
  }

  commonTexts(margin) {
    const { pen, rows } = this, x = this.scale.end + 12;
    const look = margin && margin.small ? "number warning" : "number";
    const text = margin ? (margin.small ? "! " : "") + written(margin.value, "V", 3) : "";
    if (this.slim) {
      pen.text("head", EDGE, rows.commonHead, `${this.heads[1]} ${this.tails[1]}`);
      if (text) pen.text(look, pen.width - EDGE, rows.commonHead, `margin ${text}`, "end");
      return;
    }
    pen.text("head", EDGE, rows.commonMode + 4, this.heads[1]);
    pen.text("number", x, rows.commonMode + 4, this.tails[1]);
    if (!this.message) pen.text("head", EDGE, rows.margin + 4, "margin");
    pen.text(look, x, rows.margin + 4, text);
  }

  drawMargin(margin) {
    const { pen, rows, scale } = this;
    const ends = [margin.pin, margin.limit].map((end) => scale.inside(end)).sort((a, b) => a - b);
    dimension(pen, margin.small ? "warning" : "plain", ends[0], ends[1], rows.margin);
    if (margin.value < 0) {
      const x = scale.inside(margin.pin), y = rows.commonMode;
      pen.line("cross", x - 4, y - 4, x + 4, y + 4);
      pen.line("cross", x - 4, y + 4, x + 4, y - 4);
    }
  }

  // -- what moves ---------------------------------------------------------------------------

  drawShades() {
    if (!this.switches) return;
    const { pen, levels, rows, scale } = this;
    pen.box("band", scale.px(levels.lower), rows.tripMarkers, scale.px(levels.upper), rows.axis);
    for (const trip of ["lower", "upper"]) {
      const span = levels[`${trip}_interval`];
      if (span && finite(...span).length === 2) {
        pen.box(`${trip} over`, scale.px(span[0]), rows.tripMarkers, scale.px(span[1]), rows.axis);
      }
    }
  }

  /** Lead the trips down to the input range, or the pins where they do not see the trips. */
  drawWitnesses() {
    const { pen, levels, rows, scale } = this;
    const atTrips = levels.signal_at_pin;
    const ends = atTrips ? [levels.lower, levels.upper] : levels.pins;
    const top = this.slim ? rows.commonMode - 10 : rows.below;
    ["lower", "upper"].forEach((trip, k) => {
      const x = scale.px(ends[k]);
      pen.line(`${atTrips ? trip : "pin"} witness`, x, top, x, rows.margin + 8);
    });
  }

  drawTrips() {
    const { pen, levels, rows, scale } = this;
    if (!this.switches) {
      drawMessage(pen, this.message, rows.tripNames);
      return;
    }
    for (const trip of ["lower", "upper"]) {
      const x = scale.px(levels[trip]);
      pen.line(`${trip} stem`, x, rows.axis, x, rows.tripMarkers);
    }
    if (this.reach && levels.pins) this.drawWitnesses();
    const places = this.tripPlaces();
    tripTags(pen, levels, places, rows.tripNames, rows.tripMarkers, this.walls);
    this.drawWidth(...places);
  }

  drawWidth(lower, upper) {
    const { pen, walls } = this, y = this.rows.tripMarkers + 23;
    const text = `width ${written(this.levels.width, "V", 3)}`, room = textWidth(text, SMALL, true);
    const row = [lower + 24, Math.max(upper - 24, lower + 24)];
    const inner = place([centred((lower + upper) / 2, room)], row, { walls, clearance: CLEARANCE });
    if (inner) {
      dimension(pen, "width", lower, upper, y, { cut: [inner[0] - 5, inner[0] + room + 5] });
      pen.text("width bold", inner[0], y + 4, text);
      return;
    }
    const start = this.beside(room, lower - 21, upper + 21);
    if (start === null) {
      dimension(pen, "width", lower, upper, y);
      return;
    }
    dimension(pen, "width", lower, upper, y, {
      reach: start > lower ? start - 5 : start + room + 5,
    });
    pen.text("width bold", start, y + 4, text);
  }

  /** Place the width outside the band: where it moves least, in doubt on the right. */
  beside(room, left, right) {
    const end = this.pen.width - EDGE;
    const sides = [[right, [right, end]], [left - room, [EDGE, left]]];
    let best = null;
    for (const [start, row] of sides) {
      const options = { walls: this.walls, clearance: CLEARANCE };
      const starts = place([{ start, length: room }], row, options);
      if (starts && (!best || Math.abs(starts[0] - start) < best[0])) {
        best = [Math.abs(starts[0] - start), starts[0]];
      }
    }
    return best ? best[1] : null;
  }

  drawLevels() {
    const { pen, rows, scale, slim } = this;
    const shown = [];
    for (const [name, sign] of LEVEL_ROWS) {
      for (const value of finite(this.levels[name])) {
        const text = written(value);
        shown.push({ x: scale.px(value), name, sign, text, room: symbolWidth(sign, text) });
      }
    }
    shown.sort((a, b) => a.x - b.x);
    const row = [slim ? EDGE : scale.start - 10, pen.width - EDGE];
    const options = { walls: slim ? [] : this.walls, gap: 10, clearance: CLEARANCE };
    const starts = place(shown.map(({ x, room }) => centred(x, room)), row, options) || [];
    starts.forEach((start, k) => {
      const { x, name, sign, text, room } = shown[k];
      levelMarker(pen, name, x, rows.levelMarkers);
      const near = clamp(x, start + 3, start + room - 3);
      if (Math.abs(x - near) > 1) {
        pen.line("lead", x, rows.levelMarkers + 6, near, rows.levelMarkers + 10);
      }
      pen.symbol("number", start, rows.levelMarkers + 20, sign, text);
    });
    if (shown.length && !slim) pen.text("head", EDGE, rows.levelMarkers + 4, "levels");
  }
}

/** Range of the axis: the rails, a little more, and whatever lies outside. */
function rulerRange(levels) {
  if (!supplied(levels)) return [0, 1];
  const { v_ee: vEe, v_cc: vCc } = levels, swing = vCc - vEe;
  const content = finite(
    vEe, vCc, levels.output_high, levels.output_low, levels.reference,
    ...(levels.signal_span || []),
  );
  if (switches(levels)) {
    const ends = [...(levels.lower_interval || []), ...(levels.upper_interval || [])];
    content.push(...finite(levels.lower, levels.upper, ...ends));
  }
  let low = Math.min(...content), high = Math.max(...content);
  const pad = 0.05 * (high - low);
  if (low >= vEe - 0.02 * swing && high <= vCc + 0.02 * swing) {
    const near = finite(...(levels.common_mode || [])).filter(
      (v) => vEe - 0.15 * swing <= v && v <= vCc + 0.15 * swing,
    );
    low = Math.min(low, ...near, vEe - 0.03 * swing);
    high = Math.max(high, ...near, vCc + 0.03 * swing);
    return [low - 0.02 * swing, high + 0.02 * swing];
  }
  return outward(low - pad, high + pad, stepFor(high - low, 10));
}

function drawable(span) {
  return span && finite(...span).length === 2 ? [Math.min(...span), Math.max(...span)] : null;
}

function signalHead(signal) {
  if (!signal) return "signal";
  const tail = shortUnit(signal) ? ` / ${shortUnit(signal)}` : "";
  return cut(cut(signal.name, GUTTER[1] - textWidth(tail)) + tail, GUTTER[1]);
}

function extent(middle, text) {
  const half = textWidth(text) / 2;
  return [middle - half, middle + half];
}

function railNumber(value, step) {
  if (Math.abs(value / step - Math.round(value / step)) < 1e-6) return tickNumber(value, step);
  return general(value, 4).replaceAll("-", MINUS);
}
