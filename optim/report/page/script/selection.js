// A design chosen in a plot is chosen in the table, and the other way round.

function beginSelection(models) {
  let ours = false;
  models.designs.selected.properties.indices.change.connect(() => {
    if (ours) return;
    state.chosen = new Set(models.designs.selected.indices.map(flip));
    changed("chosen");
  });
  on("chosen", () => {
    const wanted = Array.from(state.chosen, flip).sort((a, b) => a - b);
    const now = Array.from(models.designs.selected.indices).sort((a, b) => a - b);
    if (wanted.length === now.length && wanted.every((k, i) => k === now[i])) return;
    ours = true;
    models.designs.selected.indices = wanted;
    ours = false;
  });
  byId("choose-none").addEventListener("click", () => {
    state.chosen.clear();
    changed("chosen");
  });
}
