// The table of designs: sorted by any column, choosing and picking by row.

const rows = [];

const VIOLATION = "violation";

// Where nothing is feasible, what is missed in all counts most.
function tableColumns() {
  const missed = page.front_size === 0 && columns.has(VIOLATION);
  return [
    ...(missed ? [{ key: VIOLATION, head: columns.get(VIOLATION).label, wanted: "0 is feasible" }] : []),
    ...page.aims.map((aim) => ({ key: aim.key, head: withUnit(columns.get(aim.key)), wanted: `${aim.sense}d` })),
    ...page.bounds.map((bound) => ({
      key: bound.value, margin: bound.margin,
      head: withUnit(columns.get(bound.value)), wanted: bound.words,
    })),
  ];
}

function headCell(column) {
  const sort = () => {
    const again = state.sort.key === column.key;
    state.sort = { key: column.key, falling: again ? !state.sort.falling : true };
    orderRows();
  };
  const button = element("button", { type: "button", onclick: sort }, column.head);
  return element("th", { scope: "col", class: "num", "data-key": column.key }, button, element("br"), element("small", {}, column.wanted));
}

function numberCell(column, k) {
  const here = value(column.key, k);
  if (!column.margin || !Number.isFinite(here)) return element("td", { class: "num" }, shown(here));
  const margin = value(column.margin, k);
  const active = margin >= 0 && margin < page.active_margin ? "*" : "";
  const words = `${shown(here)} (${signed(margin, 2)}${active})`;
  return element("td", { class: margin < 0 ? "num missed" : "num" }, words);
}

function makeRow(k, shownColumns) {
  const tick = element("input", { type: "checkbox", "aria-label": `choose ${designName(k)}` });
  tick.addEventListener("change", () => {
    if (tick.checked) state.chosen.add(k);
    else state.chosen.delete(k);
    changed("chosen");
  });
  const pick = element("button", { type: "button", disabled: k === BASELINE, onclick: () => toggleTray(k) }, "tray");
  const row = element(
    "tr", { "data-id": page.designs.id[k], class: k === BASELINE ? "baseline" : null },
    element("td", {}, tick), element("td", {}, pick),
    element("th", { scope: "row" }, markDrawing(markOf(k)), designName(k)),
    element("td", {}, about(k)),
    ...shownColumns.map((column) => numberCell(column, k)),
  );
  return { k, row, tick, pick };
}

function orderRows() {
  const { key, falling } = state.sort;
  const size = (k) => (Number.isFinite(value(key, k)) ? value(key, k) : falling ? -Infinity : Infinity);
  const ordered = [...rows].sort((a, b) => {
    if (a.k === BASELINE || b.k === BASELINE) return a.k === BASELINE ? -1 : 1;
    return (falling ? size(b.k) - size(a.k) : size(a.k) - size(b.k)) || a.k - b.k;
  });
  byId("designs").tBodies[0].append(...ordered.map((one) => one.row));
  for (const cell of document.querySelectorAll("#designs th[data-key]")) {
    const here = cell.dataset.key === key;
    cell.setAttribute("aria-sort", here ? (falling ? "descending" : "ascending") : "none");
  }
}

function showRows() {
  for (const { k, row, tick, pick } of rows) {
    const chosen = state.chosen.has(k);
    row.hidden = !state.visible[k] || (state.onlyChosen && !chosen && k !== BASELINE);
    row.classList.toggle("chosen", chosen);
    tick.checked = chosen;
    const slot = state.tray.indexOf(k);
    pick.textContent = slot < 0 ? "to tray" : `${slot + 1}: take out`;
    pick.setAttribute("aria-label", `${designName(k)} ${slot < 0 ? "to the tray" : "out of the tray"}`);
  }
}

function beginTable() {
  const shownColumns = tableColumns();
  const head = element(
    "tr", {}, element("th", { scope: "col" }, "choose"), element("th", { scope: "col" }, "tray"),
    element("th", { scope: "col" }, "design"), element("th", { scope: "col" }, "is"),
    ...shownColumns.map(headCell),
  );
  byId("designs").tHead.append(head);
  for (let k = 0; k < count; k += 1) rows.push(makeRow(k, shownColumns));
  const first = shownColumns[0].key;
  state.sort = { key: first, falling: first !== VIOLATION && page.aims[0].sense === "maximise" };
  orderRows();
  byId("only-chosen").addEventListener("change", (event) => {
    state.onlyChosen = event.target.checked;
    showRows();
  });
  for (const subject of ["visible", "chosen", "tray"]) on(subject, showRows);
}
