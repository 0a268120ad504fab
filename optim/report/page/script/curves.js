// Outlines, pressure, layer and off-design curves of the baseline and the tray.

const outlines = unpack(page.outlines);
const perOutline = 2 * page.outlines.shape[1];

function linesOf(curves) {
  return {
    xs: curves.map((one) => one.x),
    ys: curves.map((one) => one.y),
    color: curves.map((one) => one.look.color),
    dash: curves.map((one) => one.look.dash),
    width: curves.map((one) => one.look.width),
  };
}

function marksOn(points) {
  const known = points.filter((one) => Number.isFinite(one.x) && Number.isFinite(one.y));
  return {
    x: known.map((one) => one.x),
    y: known.map((one) => one.y),
    color: known.map((one) => one.look.color),
    marker: known.map((one) => one.look.marker),
  };
}

function fillPlot(models, name, curves, points = []) {
  models[`${name}_lines`].data = linesOf(curves);
  models[`${name}_marks`].data = marksOn(points);
}

function outlineOf(k) {
  const flat = outlines.subarray(k * perOutline, (k + 1) * perOutline);
  const millimetres = 1000 * page.chord;
  const at = (i) => Array.from({ length: perOutline / 2 + 1 }, (_, p) => flat[(2 * p + i) % perOutline] * millimetres);
  return { x: at(0), y: at(1) };
}

function showOutlines(models) {
  fillPlot(models, "outline", compared().map(({ k, look }) => ({ ...outlineOf(k), look })));
}

// The compared designs that have been flown, with their flow at the condition.
function flownHere() {
  const condition = byId("condition").value;
  return compared()
    .filter(({ k }) => page.flown[k])
    .map((one) => ({ ...one, flow: page.flown[one.k][condition] }));
}

function interpolated(x, y, at) {
  for (let i = 1; i < x.length; i += 1) {
    if ((x[i - 1] - at) * (x[i] - at) <= 0 && x[i] !== x[i - 1]) {
      return y[i - 1] + ((y[i] - y[i - 1]) * (at - x[i - 1])) / (x[i] - x[i - 1]);
    }
  }
  return NaN;
}

function showSides(models) {
  const layer = page.layer_columns.indexOf(byId("layer").value);
  const words = byId("layer").selectedOptions[0].textContent;
  for (const side of ["upper", "lower"]) {
    const found = flownHere()
      .filter(({ flow }) => flow[side])
      .map((one) => ({ ...one, rows: unpackRows(one.flow[side]) }));
    const curve = (row) => found.map(({ rows, look }) => ({ x: rows[0], y: rows[row], look }));
    const turns = found.map(({ rows, look, flow }) => {
      const at = flow.point[`transition_${side}`] ?? NaN;
      return { x: at, y: interpolated(rows[0], rows[1], at), look };
    });
    fillPlot(models, `pressure_${side}`, curve(1), turns);
    fillPlot(models, `layer_${side}`, curve(layer));
    models[`layer_${side}`].left[0].axis_label = words;
  }
  sayGaps();
}

function sayGaps() {
  const without = flownHere().filter(({ flow }) => !flow.upper);
  const gaps = without.map(({ k, flow }) => `${designName(k)}: ${flow.point.outcome.replaceAll("_", " ")}`);
  const words = gaps.length ? ` Without an answer here: ${gaps.join("; ")}.` : "";
  byId("layer-note").textContent = `Marks on the pressure: transition. Suction is upward.${words}`;
}

const OFF_DESIGN = {
  lift: ["alpha_deg", "cl"],
  drag: ["cl", "cd"],
  moment: ["cl", "cm_quarter"],
  centre: ["cl", "x_cp"],
};

// The centre of pressure runs to infinity at zero lift: no line may cross it.
function partedAtZeroLift({ x, y, look }) {
  const parted = { x: [], y: [], look };
  for (let i = 0; i < x.length; i += 1) {
    if (i && x[i - 1] * x[i] < 0) {
      parted.x.push(NaN);
      parted.y.push(NaN);
    }
    parted.x.push(x[i]);
    parted.y.push(y[i]);
  }
  return parted;
}

const DRAG_SHOWN = 4;

// Past the stall drag rises so far that nothing could be read before it.
function spanDrag(models, curves) {
  const known = curves.flatMap(({ y }) => Array.from(y).filter(Number.isFinite));
  models.drag.y_range.start = 0;
  models.drag.y_range.end = known.length ? DRAG_SHOWN * Math.min(...known) : 1;
}

function showOffDesign(models) {
  const nose = byId("nose").value;
  const found = flownHere().map((one) => ({ ...one, rows: unpackRows(one.flow[nose]) }));
  for (const [name, [across, up]] of Object.entries(OFF_DESIGN)) {
    const [i, j] = [across, up].map((column) => page.sweep_columns.indexOf(column));
    const points = nose === "clean"
      ? found.map(({ flow, look }) => ({ x: flow.point[across] ?? NaN, y: flow.point[up] ?? NaN, look }))
      : [];
    const curves = found.map(({ rows, look }) => ({ x: rows[i], y: rows[j], look }));
    fillPlot(models, name, name === "centre" ? curves.map(partedAtZeroLift) : curves, points);
    if (name === "drag") spanDrag(models, curves);
  }
}

function beginCurves(models) {
  byId("condition").addEventListener("change", () => changed("look"));
  byId("layer").addEventListener("change", () => showSides(models));
  byId("nose").addEventListener("change", () => showOffDesign(models));
  on("look", () => {
    showSides(models);
    showOffDesign(models);
  });
  on("tray", () => {
    showOutlines(models);
    changed("look");
  });
}
