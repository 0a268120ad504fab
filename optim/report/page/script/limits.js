// Limits on every quantity, by slider and by number box.

const STEPS = 1000;

function rangeOf(column) {
  const known = Array.from(column.values).filter(Number.isFinite);
  return known.length ? [Math.min(...known), Math.max(...known)] : null;
}

function setLimit(key, side, bound) {
  const limit = state.limits.get(key) ?? { low: -Infinity, high: Infinity };
  limit[side] = bound;
  if (limit.low === -Infinity && limit.high === Infinity) state.limits.delete(key);
  else state.limits.set(key, limit);
  changed("limits");
}

function limitControls(column) {
  const [low, high] = rangeOf(column);
  const spread = high - low || 1;
  const ends = { low, high };
  const wide = { low: -Infinity, high: Infinity };
  const box = element("fieldset", { class: "limit" }, element("legend", {}, withUnit(column)));
  const inputs = {};
  for (const side of ["low", "high"]) {
    const words = `${column.label}, ${side === "low" ? "least" : "greatest"}`;
    const number = element("input", { type: "number", step: "any", "aria-label": words });
    const slider = element("input", {
      type: "range", min: 0, max: STEPS, step: 1, "aria-label": `${words}, slider`,
    });
    slider.addEventListener("input", () => {
      const atEnd = Number(slider.value) === (side === "low" ? 0 : STEPS);
      setLimit(column.key, side, atEnd ? wide[side] : low + (spread * Number(slider.value)) / STEPS);
    });
    number.addEventListener("change", () => {
      setLimit(column.key, side, number.value === "" ? wide[side] : Number(number.value));
    });
    inputs[side] = { number, slider };
  }
  const show = () => {
    const limit = state.limits.get(column.key) ?? wide;
    box.classList.toggle("moved", state.limits.has(column.key));
    for (const side of ["low", "high"]) {
      const bound = Number.isFinite(limit[side]) ? limit[side] : ends[side];
      inputs[side].number.value = Number(bound.toPrecision(4));
      inputs[side].slider.value = Math.round(((bound - low) / spread) * STEPS);
      inputs[side].slider.setAttribute("aria-valuetext", shown(bound));
    }
  };
  on("limits", show);
  show();
  box.append(
    inputs.low.number,
    element("div", { class: "slide" }, inputs.low.slider, inputs.high.slider),
    inputs.high.number,
  );
  return box;
}

const OPEN_AT_FIRST = new Set(["Objectives", "Limits"]);

function beginLimits() {
  for (const [group, members] of grouped(columns.values())) {
    const open = OPEN_AT_FIRST.has(group);
    const body = element("div");
    const fill = () => {
      if (!body.hasChildNodes()) body.append(...members.filter(rangeOf).map(limitControls));
    };
    const part = element("details", { open }, element("summary", {}, group), body);
    part.addEventListener("toggle", fill);
    if (open) fill();
    byId("limit-groups").append(part);
  }
  byId("limits-clear").addEventListener("click", () => {
    state.limits.clear();
    changed("limits");
  });
}
