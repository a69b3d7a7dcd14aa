// From the settings to everything that stands on the volt axis; formulas are LAW's alone.

/** Values of every symbol of the law; levels that are not given follow the rails. */
function lawValues(form, given) {
  const values = {};
  for (const name of form.parts) values[name] = given[name];
  values.V_CC = given.V_CC;
  if (form.split) values.V_EE = given.V_EE;
  for (const name of form.levels) values[name] = given[name] ?? followed(form, name, given);
  if (form.pushPull) values.R_OH = given.r_high;
  else values.I_LK = given.leakage;
  values.R_OL = given.r_low;
  values.V_OS = given.offset;
  values.I_BP = given.bias_plus;
  values.I_BN = given.bias_minus;
  return values;
}

/** What a level is while it is not given. */
function followed(form, name, given) {
  if (name === "V_PU") return given.V_CC;
  if (name === "V_L") return 0;
  if (name === "V_OH") return given.V_CC - given.drop_high;
  if (name === "V_OL") return (form.split ? given.V_EE : 0) + given.drop_low;
  return NaN;
}

function apply(compiled, values) {
  return compiled.of(...compiled.names.map((name) => values[name]));
}

/** Name of the first rule in TABLES.status that the values break; "OK" where the stage switches. */
function statusOf(form, values, upper, lower) {
  const high = values.V_OH ?? values.V_PU ?? Infinity;
  const low = form.split ? values.V_EE : 0;
  if (!Object.values(values).every(Number.isFinite)) return "NOT_FINITE";
  if (!form.parts.every((name) => values[name] > 0)) return "NOT_POSITIVE";
  if (!(values.V_CC > low)) return "RAILS";
  if (!(high > values.V_OL)) return "OUTPUT_LEVELS";
  if (form.custom && againstSense(form, values)) return "SENSE";
  const apart = upper > lower && Number.isFinite(upper) && Number.isFinite(lower);
  return apart ? "OK" : "NO_HYSTERESIS";
}

/** Whether the values of a custom circuit turn the sense that was stated for it. */
function againstSense(form, values) {
  const [atZero, atOne] = [0, 1].map((signal) => {
    const [, plus, minus] = nodesAt(LAW.upperState, values, signal);
    return plus - minus;
  });
  return form.inverting ? atOne >= atZero : atOne <= atZero;
}

function tripPoints(form, given) {
  const values = lawValues(form, given);
  const [upper, lower] = apply(LAW.trips, values);
  const status = statusOf(form, values, upper, lower);
  return status === "OK"
    ? { upper, lower, status, values } : { upper: NaN, lower: NaN, status, values };
}

/** Lowest and highest value of everything that carries a tolerance or limits. */
function toleranceBox(form, state) {
  const box = {};
  for (const name of [...form.parts, ...form.levels]) {
    const value = state.value[name], tol = state.tol[name] || 0;
    if (value !== null) box[name] = ends(value, tol);
  }
  for (const name of form.split ? ["V_CC", "V_EE"] : ["V_CC"]) {
    box[name] = ends(state.value[name], state.tol.V_CC || 0);
  }
  for (const [name, pair] of Object.entries(form.limits)) {
    if (acts(form, state, name)) box[name] = pair;
  }
  return Object.entries(box).filter(([, [low, high]]) => low < high);
}

function ends(value, tol) {
  return [value * (1 - tol), value * (1 + tol)].sort((a, b) => a - b);
}

function acts(form, state, name) {
  if (name === "drop_high") return form.pushPull && state.value.V_OH === null;
  if (name === "drop_low") return state.value.V_OL === null;
  if (name === "r_high") return form.pushPull;
  return name === "leakage" ? !form.pushPull : true;
}

/** What is uncertain: resistances, then voltages and currents. */
function uncertain(form, state) {
  const box = toleranceBox(form, state);
  const isResistance = ([name]) => form.parts.includes(name) || name === "r_high" || name === "r_low";
  return [box.filter(isResistance), box.filter((entry) => !isResistance(entry))];
}

/** Why there are no intervals although tolerances are stated; empty otherwise. */
function notEvaluated(form, state) {
  return uncertain(form, state)[0].length > form.mostResistances ? TABLES.tooMany : "";
}

/**
 * Exact interval of either trip: its extremes lie in corners of the box. Voltages and currents act
 * by themselves, so that each corner of the resistances needs one evaluation for each of them.
 */
function tripIntervals(form, state) {
  const [resistances, sources] = uncertain(form, state);
  const none = !resistances.length && !sources.length;
  if (none || notEvaluated(form, state) || !form.exact) return [null, null];
  const found = [[Infinity, -Infinity], [Infinity, -Infinity]];
  let possible = resistances.every(([name, pair]) => pair[0] > 0 || !form.parts.includes(name));
  for (let corner = 0; corner < 2 ** resistances.length && possible; corner += 1) {
    const given = { ...state.value };
    resistances.forEach(([name, pair], k) => { given[name] = pair[(corner >> k) & 1]; });
    for (const [name, pair] of sources) given[name] = pair[0];
    const spans = spansOver(form, given, sources);
    possible = spans.slice(2).every(([low]) => low > 0);
    found.forEach((range, k) => {
      range[0] = Math.min(range[0], spans[k][0]);
      range[1] = Math.max(range[1], spans[k][1]);
    });
  }
  return possible ? found : [[NaN, NaN], [NaN, NaN]];
}

/** Lowest and highest of the trips, and of what must stay positive, over the sources. */
function spansOver(form, given, sources) {
  const base = compared(form, given);
  const spans = base.map((value) => [value, value]);
  for (const [name, pair] of sources) {
    const moved = compared(form, { ...given, [name]: pair[1] });
    moved.forEach((value, k) => {
      const step = value - base[k];
      spans[k][0] += Math.min(step, 0);
      spans[k][1] += Math.max(step, 0);
    });
  }
  return spans;
}

/** Both trips; then width, supply and swing, which must be positive. */
function compared(form, given) {
  const values = lawValues(form, given);
  const [upper, lower] = apply(LAW.trips, values);
  const highs = ["V_OH", "V_PU"].filter((name) => own(values, name));
  const swings = highs.map((name) => values[name] - values.V_OL);
  return [upper, lower, upper - lower, values.V_CC - (values.V_EE ?? 0), ...swings];
}

/** Voltages of output, plus and minus pin. */
function nodesAt(state, values, signal) {
  return apply(LAW[state], { ...values, V_IN: signal });
}

/** Everything that stands on the volt axis. */
function evaluate(form, state) {
  const { upper, lower, status, values } = tripPoints(form, state.value);
  const intervals = tripIntervals(form, state);
  const at = LAW.upperState === "high" ? [upper, lower] : [lower, upper];
  const [high, low] = ["high", "low"].map((name, k) => nodesAt(name, values, at[k]));
  const vEe = form.split ? state.value.V_EE : 0, vCc = state.value.V_CC;
  const { common_mode_low: from, common_mode_high: upTo } = state.value;
  const signal = signalAt(form.signal, vCc);
  const span = signal ? signal.span.map((end) => volts(signal, end)) : null;
  return {
    form, values, signal, upper, lower, width: upper - lower, middle: (upper + lower) / 2,
    upper_interval: intervals[0], lower_interval: intervals[1], v_ee: vEe, v_cc: vCc,
    output_high: high[0], output_low: low[0], pins: pinRange([high, low], intervals),
    signal_at_pin: LAW.signalAtPin,
    reference: values.V_REF ?? null,
    common_mode: from === null || upTo === null ? null : [vEe + from, vCc - upTo],
    signal_span: span && span.sort((a, b) => a - b),
    ok: status === "OK", message: TABLES.status[status], not_evaluated: notEvaluated(form, state),
  };
}

/** What the input pins see at both trips; over the tolerances where a pin is the signal itself. */
function pinRange(states, intervals) {
  const seen = states.flatMap((nodes) => nodes.slice(1));
  if (LAW.signalAtPin) seen.push(...intervals.flatMap((i) => i || []));
  return seen.every(Number.isFinite) ? [Math.min(...seen), Math.max(...seen)] : null;
}

/** Output against signal along both paths. */
function switchingLoop(levels) {
  const room = levels.ok ? levels.width : 0;
  const marks = [levels.v_ee, levels.v_cc, levels.upper + room, levels.lower - room];
  const known = finite(...marks, ...(levels.signal_span || []));
  const axis = [Math.min(...known), Math.max(...known)];
  const path = ([start, end], trip, before) => {
    const after = before === "high" ? "low" : "high";
    const signal = [start, trip, trip, end];
    return [signal, signal.map((x, k) => nodesAt(k < 2 ? before : after, levels.values, x)[0])];
  };
  const [upperState, lowerState] = LAW.upperState === "high" ? ["high", "low"] : ["low", "high"];
  return {
    axis, levels,
    rising: path(axis, levels.upper, upperState),
    falling: path([axis[1], axis[0]], levels.lower, lowerState),
  };
}

function finite(...values) {
  return values.filter((value) => value !== null && value !== undefined && Number.isFinite(value));
}

/** The signal as it is at a supply voltage, of which a ratiometric one is a share. */
function signalAt(signal, vCc) {
  if (!signal || !signal.ratiometric) return signal;
  if (signal.kind === "linear") {
    return { ...signal, per_unit: signal.per_unit * vCc, at_zero: signal.at_zero * vCc };
  }
  return { ...signal, volts: signal.volts.map((share) => share * vCc) };
}

/** Voltage at the signal source for a quantity in the unit of the signal. */
function volts(signal, quantity) {
  return signal.kind === "linear"
    ? signal.at_zero + signal.per_unit * quantity
    : between(signal.quantities, signal.volts, quantity);
}

/** The quantity for a voltage; NaN where the sensor has no such voltage. */
function quantity(signal, voltage) {
  return signal.kind === "linear"
    ? (voltage - signal.at_zero) / signal.per_unit
    : between(signal.volts, signal.quantities, voltage);
}

/** Interpolate in a table whose arguments rise or fall. */
function between(arguments_, results, at) {
  const sign = arguments_[arguments_.length - 1] > arguments_[0] ? 1 : -1;
  for (let k = 1; k < arguments_.length; k += 1) {
    const [a, b] = [arguments_[k - 1], arguments_[k]];
    if (sign * (at - a) >= 0 && sign * (b - at) >= 0) {
      return results[k - 1] + (results[k] - results[k - 1]) * ((at - a) / (b - a));
    }
  }
  return NaN;
}
