// The plots of the run and of the tray: set up when the rest of the page can be used already.

const LATER = ["outline", "pressure_upper", "pressure_lower", "layer_upper", "layer_lower", "lift", "drag", "moment", "centre"];

function laterModels() {
  const models = {};
  for (const name of LATER) {
    models[name] = named(name);
    models[`${name}_lines`] = named(`${name}_lines`);
    models[`${name}_marks`] = named(`${name}_marks`);
  }
  return models;
}

function showProgress() {
  const { evaluations, hypervolume } = page.progress;
  const last = hypervolume.at(-1) || 1;
  named("progress_source").data = { x: evaluations, y: hypervolume.map((volume) => (100 * volume) / last) };
}

async function beginLater() {
  const parts = JSON.parse(byId("later").textContent);
  for (const [name, part] of Object.entries(parts)) {
    if (count) await Bokeh.embed.embed_item(part, `later-${name}`);
  }
  if (count) {
    showProgress();
    const models = laterModels();
    beginCurves(models);
    showOutlines(models);
    changed("look");
  }
  document.body.dataset.complete = "yes";
}
