// The switching loop: output against signal, both ways.

const LOOP_SLIM = 440, OFFSET = 7, LEAST_JUMP = 26, LEAST_BAND = 44, PATH_TIP = 13;

function drawLoop(data, width) {
  return new LoopDrawing(data, width).drawn();
}

class LoopDrawing {
  constructor(data, width) {
    this.data = data;
    this.levels = data.levels;
    this.slim = width < LOOP_SLIM;
    this.switches = switches(data.levels);
    const height = clamp(0.56 * width, 270, 440);
    this.pen = new Pen(width, height);
    const top = this.levels.signal || !this.switches ? 62 : 47;
    this.up = new Scale(...this.range(), height - (this.slim ? 48 : 34), top);
    this.numbers = upNumbers(this.up);
    const widest = Math.max(0, ...this.numbers.texts.map((text) => textWidth(text)));
    const left = Math.max(widest + 8 + OFFSET + (this.slim ? EDGE : 26), this.slim ? 46 : 62);
    this.across = new Scale(...steady(data.axis), left, width - (this.slim ? 22 : 118));
  }

  range() {
    const { v_ee: vEe, v_cc: vCc, output_low: low, output_high: high } = this.levels;
    const outputs = [...this.data.rising[1], ...this.data.falling[1]];
    return padded(finite(vEe, vCc, low, high, ...outputs), this.slim ? 0.13 : 0.06);
  }

  drawn() {
    const { lower, upper, message } = this.levels;
    if (this.switches) this.drawBand();
    this.drawAcross();
    this.drawUp();
    this.drawOutputs();
    this.drawPaths();
    if (this.switches) {
      const places = [lower, upper].map((value) => this.across.inside(value));
      tripTags(this.pen, this.levels, places, 17, this.up.end - 8);
    } else drawMessage(this.pen, message || NO_TRIPS, 17);
    return this.pen;
  }

  drawBand() {
    const [lower, upper] = ["lower", "upper"].map((trip) => this.across.inside(this.levels[trip]));
    const top = this.up.end - 8, bottom = this.up.start;
    this.pen.box("band", lower, top, upper, bottom);
    this.pen.line("lower witness", lower, top, lower, bottom);
    this.pen.line("upper witness", upper, top, upper, bottom);
  }

  drawAcross() {
    const { pen, across: scale } = this, y = this.up.start + OFFSET;
    pen.line("frame", scale.start, y, scale.end, y);
    const [factor, unit] = prefixFor(scale.low, scale.high, "V");
    const step = stepFor((scale.high - scale.low) / factor, (scale.end - scale.start) / 70);
    const values = ticks(scale.low / factor, scale.high / factor, step);
    const places = values.map((value) => scale.px(value * factor));
    for (const x of places) pen.line("tick", x, y, x, y + 5);
    const texts = values.map((value) => tickNumber(value, step));
    const spans = places.map((x, k) => extent(x, texts[k]));
    for (const k of thinned(spans, roundestFirst(values, step), { gap: 8 })) {
      pen.text("number", places[k], y + 18, texts[k], "middle");
    }
    if (this.slim) pen.text("head", scale.end, y + 34, `signal / ${unit}`, "end");
    else pen.text("head", scale.end + 16, y + 18, `signal / ${unit}`);
  }

  drawUp() {
    const { pen, up: scale } = this, x = this.across.start - OFFSET;
    pen.line("frame", x, scale.end, x, scale.start);
    const { factor, unit, values, texts } = this.numbers;
    values.forEach((value, k) => {
      const y = scale.px(value * factor);
      pen.line("tick", x - 5, y, x, y);
      pen.text("number", x - 8, y + 4, texts[k], "end");
    });
    if (this.slim) pen.text("head", EDGE, scale.start + OFFSET + 34, `output / ${unit}`);
    else pen.upright("head", 17, (scale.start + scale.end) / 2, `output / ${unit}`);
  }

  /** A guide, the marker, the name and the value of each output level. */
  drawOutputs() {
    const shown = [["output_high", "V_OH"], ["output_low", "V_OL"]]
      .map(([name, sign]) => ({ name, sign, value: this.levels[name] }))
      .filter(({ value }) => Number.isFinite(value))
      .map((entry) => ({ ...entry, y: this.up.inside(entry.value) }))
      .sort((a, b) => a.y - b.y);
    const wants = shown.map(({ y }) => centred(y, 16));
    const starts = spreadOut(wants, [this.up.end - 10, this.up.start + 10]) || [];
    const left = this.across.start, right = this.across.end;
    starts.forEach((start, k) => {
      const { name, sign, value, y } = shown[k], text = written(value);
      this.pen.line("guide", left, y, right + (this.slim ? 6 : 4), y);
      levelMarker(this.pen, name, right + (this.slim ? 12 : 9), y);
      if (this.slim) {
        const x = this.rightHeavy() ? left + 4 : right - symbolWidth(sign, text);
        this.pen.symbol("number", x, name === "output_high" ? y - 8 : y + PITCH + 2, sign, text);
      } else this.pen.symbol("number", right + 18, start + 12, sign, text);
    });
  }

  /** Whether the trips stand in the right half, so that the left one has room. */
  rightHeavy() {
    const middle = (this.across.low + this.across.high) / 2;
    return this.switches && this.levels.lower + this.levels.upper > 2 * middle;
  }

  drawPaths() {
    for (const [way, trip, share] of [["rising", "upper", 0.36], ["falling", "lower", 0.36]]) {
      const [signal, output] = this.data[way];
      const points = signal.map((x, k) => [this.across.px(x), this.up.px(output[k])]);
      if (points.flat().every(Number.isFinite)) {
        this.pen.trace(`${trip} path`, points);
        this.drawTips(trip, points, share);
      }
    }
  }

  /** One tip along the jump of a path, and one along its part inside the band. */
  drawTips(trip, points, share) {
    if (!this.switches) return;
    const [before, here] = points[1], drop = points[2][1] - here;
    if (Math.abs(drop) >= LEAST_JUMP) {
      const sign = drop > 0 ? 1 : -1;
      arrowTip(this.pen, trip, before, here + share * drop + sign * 5, 0, sign, PATH_TIP);
    }
    const [from, to] = ["lower", "upper"].map((name) => this.across.px(this.levels[name]));
    if (to - from >= LEAST_BAND) {
      const middle = (from + to) / 2, rises = points[3][0] > points[0][0];
      const ordered = rises ? points : [...points].reverse();
      const sign = rises ? 1 : -1;
      arrowTip(this.pen, trip, middle + 5 * sign, height(ordered, middle), sign, 0, PATH_TIP);
    }
  }
}

/** Ticks of the upright axis; a low one takes them closer to have three. */
function upNumbers(scale) {
  const [factor, unit] = prefixFor(scale.low, scale.high, "V");
  let step, values;
  for (const pitch of [28, 16]) {
    step = stepFor((scale.high - scale.low) / factor, (scale.start - scale.end) / pitch);
    values = ticks(scale.low / factor, scale.high / factor, step);
    if (values.length > 2) break;
  }
  return { factor, unit, values, texts: values.map((value) => tickNumber(value, step)) };
}

/** Height of a polyline that runs to the right, at a place. */
function height(points, x) {
  for (let k = 1; k < points.length; k += 1) {
    const [[x0, y0], [x1, y1]] = [points[k - 1], points[k]];
    if (x >= x0 && x < x1) return y0 + ((y1 - y0) / (x1 - x0)) * (x - x0);
  }
  return points[points.length - 1][1];
}

/** The axis in steps, so that it stays while the trips move. */
function steady([low, high]) {
  if (finite(low, high).length < 2 || !(high > low)) return [0, 1];
  return outward(low, high, stepFor(high - low, 20));
}

/** A range around some values that changes only in steps. */
function padded(values, share) {
  if (!values.length) return [0, 1];
  let low = Math.min(...values), high = Math.max(...values);
  if (!(high > low)) [low, high] = [low - 0.5, high + 0.5];
  const pad = share * (high - low);
  return outward(low - pad, high + pad, stepFor(high - low, 25));
}
