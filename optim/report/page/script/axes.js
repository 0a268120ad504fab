// Any two quantities on the axes and a third as colour.

function offerColumns(select, chosen) {
  const groups = Map.groupBy
    ? Map.groupBy(columns.values(), (column) => column.group)
    : grouped(columns.values());
  for (const [group, members] of groups) {
    const options = members.map((column) =>
      element("option", { value: column.key, selected: column.key === chosen }, withUnit(column)),
    );
    select.append(element("optgroup", { label: group }, ...options));
  }
}

function grouped(all) {
  const groups = new Map();
  for (const column of all) groups.set(column.group, [...(groups.get(column.group) ?? []), column]);
  return groups;
}

function beginAxes() {
  const aims = page.aims.map((aim) => aim.key);
  const first = page.bounds.length ? page.bounds[0].value : aims[0];
  [state.across, state.up, state.colour] = [aims[0], aims[1], aims[2] ?? first];
  for (const axis of ["across", "up", "colour"]) {
    const select = byId(axis);
    offerColumns(select, state[axis]);
    select.addEventListener("change", () => {
      state[axis] = select.value;
      changed("axes");
    });
  }
}

const BEYOND = [-0.3, 1];

function marginColumns() {
  const made = {};
  page.bounds.forEach((bound, k) => {
    const level = page.bounds.length - 1 - k;
    const within = flipped(columns.get(bound.margin).values).map((margin) =>
      Math.min(Math.max(margin, BEYOND[0]), BEYOND[1]),
    );
    made[`margin_${k}`] = within;
    made[`level_${k}`] = within.map(() => level);
  });
  return made;
}

function placeDesigns(models) {
  const marks = flipped(Array.from({ length: count }, (_, k) => MARKS[markOf(k)]));
  models.designs.data = {
    x: flipped(columns.get(state.across).values),
    y: flipped(columns.get(state.up).values),
    c: flipped(columns.get(state.colour).values),
    id: flipped(page.designs.id),
    marker: marks.map((mark) => mark.marker),
    size: marks.map((mark) => mark.size),
    ...marginColumns(),
  };
  models.baselineMark.data = {
    x: [value(state.across, BASELINE)],
    y: [value(state.up, BASELINE)],
  };
  models.trade.below[0].axis_label = axisLabel(state.across);
  models.trade.left[0].axis_label = axisLabel(state.up);
  models.colourBar.title = withUnit(columns.get(state.colour));
}

function axisLabel(key) {
  const aim = page.aims.find((one) => one.key === key);
  return withUnit(columns.get(key)) + (aim ? `, ${aim.sense}d` : "");
}

// The colours span what is seen.
function spanColours(models) {
  const { values } = columns.get(state.colour);
  const seen = Array.from(values).filter((v, k) => state.visible[k] && Number.isFinite(v));
  const [low, high] = [Math.min(...seen), Math.max(...seen)];
  const flat = !(high > low);
  models.colour.low = seen.length ? low - (flat ? 0.5 : 0) : 0;
  models.colour.high = seen.length ? high + (flat ? 0.5 : 0) : 1;
}
