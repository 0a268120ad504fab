// When the plots stand: fill them, and tie everything together.

function named(name) {
  for (const plots of Bokeh.documents) {
    const found = plots.get_model_by_name(name);
    if (found) return found;
  }
  throw new Error(`there is no plot ${name}`);
}

function plotModels() {
  return {
    designs: named("designs"), visible: named("visible"), trade: named("trade"), margins: named("margins"),
    colour: named("colour"), colourBar: named("colour_bar"), baselineMark: named("baseline_mark"),
    trayMarks: named("tray_marks"),
  };
}

function nameMargins(models) {
  const last = page.bounds.length - 1;
  models.margins.left[0].major_label_overrides = new Map(
    page.bounds.map((bound, k) => [last - k, `${bound.label}\n${bound.words}`]),
  );
}

function tie(models) {
  on("axes", () => {
    placeDesigns(models);
    spanColours(models);
    showTray(models);
  });
  on("limits", () => findVisible(models));
  on("tray", () => showTray(models));
  on("tray", showDifferences);
  on("look", showDifferences);
  for (const subject of ["visible", "chosen", "tray"]) on(subject, () => sayStatus());
}

// For paper, which keeps the width on the screen.
function measure() {
  document.documentElement.style.setProperty("--drawn", document.body.clientWidth);
}

function begin() {
  measure();
  window.addEventListener("resize", measure);
  const models = plotModels();
  if (count) {
    beginAxes();
    beginVisible();
    beginSelection(models);
    beginTable();
    beginLimits();
    beginTray();
    beginShortlist();
    drawLegend();
    nameMargins(models);
    tie(models);
    placeDesigns(models);
    findVisible(models);
    takeUp(kept() ?? { ids: atFirst().map((k) => page.designs.id[k]), notes: {} });
  } else {
    sayStatus();
  }
  document.body.dataset.ready = "yes";
  requestAnimationFrame(() => setTimeout(beginLater));
}

window.sectionwright = { begin };
