// What each design in the tray costs and gains against the baseline, quantity by quantity.

function groupsCompared() {
  return new Set(["Objectives", "Limits", "Section", conditionLabel()]);
}

function conditionLabel() {
  const name = byId("condition").value;
  return page.conditions.find((one) => one.name === name)?.label;
}

function differenceCell(column, k) {
  const [here, base] = [column.values[k], column.values[BASELINE]];
  const step = here - base;
  const share = Math.abs(base) > 0 ? `${signed((100 * step) / Math.abs(base))} %` : "";
  const words = Number.isFinite(step) ? `${signed(step)}${share ? `, ${share}` : ""}` : "";
  return element("td", { class: "num" }, shown(here), " ", element("small", {}, words));
}

function differenceRow(column, beside) {
  return element(
    "tr", {}, element("th", { scope: "row" }, withUnit(column)),
    element("td", { class: "num" }, shown(column.values[BASELINE])),
    ...beside.map(({ k }) => differenceCell(column, k)),
  );
}

function showDifferences() {
  if (!count) return;
  const beside = compared().slice(1);
  const table = byId("differences");
  const heads = beside.map(({ k, slot, look }) => element("th", { scope: "col" }, swatch(look), ` ${slot}  ${designName(k)}`));
  table.tHead.replaceChildren(
    element("tr", {}, element("th", { scope: "col" }, "quantity"), element("th", { scope: "col" }, "baseline"), ...heads),
  );
  const wanted = groupsCompared();
  const body = [];
  for (const [group, members] of grouped(columns.values())) {
    if (!wanted.has(group)) continue;
    body.push(element("tr", { class: "group" }, element("th", { colspan: 2 + beside.length, scope: "rowgroup" }, group)));
    const known = members.filter((column) => compared().some(({ k }) => Number.isFinite(column.values[k])));
    body.push(...known.map((column) => differenceRow(column, beside)));
  }
  table.tBodies[0].replaceChildren(...body);
}
