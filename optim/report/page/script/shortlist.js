// The shortlist as a file: the tray with its notes and numbers, and the limits it was found with.

function shortlist() {
  const finite = (number) => (Number.isFinite(number) ? number : null);
  return {
    shortlist: 1,
    study: page.study,
    run: page.run,
    digest: page.digest,
    limits: Array.from(state.limits, ([key, limit]) => ({ key, low: finite(limit.low), high: finite(limit.high) })),
    designs: state.tray.map((k) => ({
      id: page.designs.id[k],
      is: about(k),
      note: state.notes[page.designs.id[k]] ?? "",
      objectives: Object.fromEntries(page.aims.map((aim) => [aim.key, finite(value(aim.key, k))])),
      limits: Object.fromEntries(
        page.bounds.map((bound) => [bound.value, { value: finite(value(bound.value, k)), margin: finite(value(bound.margin, k)) }]),
      ),
    })),
    notes: state.notes,
  };
}

function exportShortlist() {
  const blob = new Blob([JSON.stringify(shortlist(), null, 1)], { type: "application/json" });
  const link = element("a", { href: URL.createObjectURL(blob), download: page.run.replace(/\.h5$/, "") + "-shortlist.json" });
  link.click();
  URL.revokeObjectURL(link.href);
  sayStatus("The shortlist is written.");
}

async function readShortlist(file) {
  let found = null;
  try {
    found = JSON.parse(await file.text());
  } catch (wrong) {
    if (!(wrong instanceof SyntaxError)) throw wrong;
  }
  if (!Array.isArray(found?.designs)) return sayStatus("That file is no shortlist.");
  if (found.digest !== page.digest) return sayStatus("That shortlist belongs to another run.");
  takeUp({ ids: found.designs.map((one) => one.id), notes: found.notes ?? {} });
  return sayStatus("The shortlist is read.");
}

function beginShortlist() {
  byId("export").addEventListener("click", exportShortlist);
  byId("import").addEventListener("change", (event) => {
    if (event.target.files.length) readShortlist(event.target.files[0]);
  });
}
