// Which designs are seen: those of the kinds asked for that keep the designer's limits.

function beginVisible() {
  for (const kind of ["beaten", "missed"]) {
    const box = byId(`show-${kind}`);
    box.checked = state[kind];
    box.disabled = !page.designs.kind.includes(kind);
    box.addEventListener("change", () => {
      state[kind] = box.checked;
      changed("limits");
    });
  }
}

function isVisible(k) {
  if (k === BASELINE) return true;
  const kind = page.designs.kind[k];
  if (kind !== "front" && !state[kind]) return false;
  for (const [key, limit] of state.limits) {
    const here = value(key, k);
    if (!(here >= limit.low && here <= limit.high)) return false;
  }
  return true;
}

function findVisible(models) {
  state.visible = Array.from({ length: count }, (_, k) => isVisible(k));
  models.visible.booleans = flipped(state.visible);
  spanColours(models);
  changed("visible");
}

function sayStatus(extra = "") {
  const seen = state.visible.map((here, k) => here && k !== BASELINE);
  const of = (kind) => seen.filter((here, k) => here && page.designs.kind[k] === kind).length;
  const parts = [`${of("front")} of the front`, `${of("beaten")} beaten`, `${of("missed")} missing a limit`];
  const limits = state.limits.size ? `${state.limits.size} limits set. ` : "";
  const words = count
    ? `Seen beside the baseline: ${parts.join(", ")}. ${limits}Chosen: ${state.chosen.size}. In the tray: ${state.tray.length}.`
    : "There are no designs yet.";
  byId("status").textContent = `${words} ${extra}`.trim();
}
