// Up to six designs beside the baseline, with the designer's notes.

const STORE = `sectionwright:${page.digest}`;

function toggleTray(k) {
  const slot = state.tray.indexOf(k);
  if (slot >= 0) state.tray.splice(slot, 1);
  else if (state.tray.length < page.tray) state.tray.push(k);
  else {
    sayStatus(`The tray holds ${page.tray} designs; take one out first.`);
    return;
  }
  changed("tray");
}

function addToTray(positions) {
  const fresh = positions.filter((k) => k !== BASELINE && !state.tray.includes(k));
  const room = page.tray - state.tray.length;
  state.tray.push(...fresh.slice(0, room));
  changed("tray");
  if (fresh.length > room) sayStatus(`The tray holds ${page.tray} designs: ${fresh.length - room} found no room.`);
}

function card({ k, slot, look }) {
  const remove = element("button", { type: "button", "aria-label": `take ${designName(k)} out`, onclick: () => toggleTray(k) }, "take out");
  const note = element("textarea", { "aria-label": `notes on ${designName(k)}`, placeholder: "Notes" });
  note.value = state.notes[page.designs.id[k]] ?? "";
  note.addEventListener("input", () => {
    state.notes[page.designs.id[k]] = note.value;
    keep();
  });
  const aims = page.aims.map((aim) => element("p", {}, `${withUnit(columns.get(aim.key))}: ${shown(value(aim.key, k))}`));
  const flown = page.flown[k] ? "" : "no curves on this page";
  return element(
    "article", { class: "card", style: `--swatch: ${look.color}`, "data-id": page.designs.id[k] },
    element("h4", {}, element("span", {}, swatch(look), slot ? `${slot}  ${designName(k)}` : designName(k)), ...(slot ? [remove] : [])),
    element("p", {}, about(k)), ...aims, ...(flown ? [element("p", { class: "nothing" }, flown)] : []), note,
  );
}

function showTray(models) {
  byId("tray").replaceChildren(...(count ? compared().map(card) : []));
  byId("tray-clear").disabled = state.tray.length === 0;
  const places = state.tray.map((k, slot) => ({ k, text: String(slot + 1) }));
  models.trayMarks.data = {
    x: places.map(({ k }) => value(state.across, k)),
    y: places.map(({ k }) => value(state.up, k)),
    text: places.map(({ text }) => text),
  };
  keep();
}

// Browsers may refuse to keep anything for a file; the exported shortlist holds it all.
function keep() {
  try {
    const ids = state.tray.map((k) => page.designs.id[k]);
    localStorage.setItem(STORE, JSON.stringify({ ids, notes: state.notes }));
  } catch (refused) {
    if (!(refused instanceof DOMException)) throw refused;
  }
}

function kept() {
  try {
    return JSON.parse(localStorage.getItem(STORE) ?? "null");
  } catch (refused) {
    return null;
  }
}

function takeUp({ ids, notes }) {
  const places = ids.map((id) => page.designs.id.indexOf(id)).filter((k) => k > BASELINE);
  state.tray = [...new Set(places)].slice(0, page.tray);
  state.notes = Object.fromEntries(Object.entries(notes).map(([id, words]) => [id, String(words)]));
  changed("tray");
}

function markedDesigns() {
  return Object.keys(page.designs.marks).map(Number);
}

// What is marked, or where nothing is, what has been flown.
function atFirst() {
  const marked = markedDesigns();
  return marked.length ? marked : Object.keys(page.flown).map(Number);
}

function beginTray() {
  byId("tray-clear").addEventListener("click", () => {
    state.tray = [];
    changed("tray");
  });
  byId("tray-marked").disabled = markedDesigns().length === 0;
  byId("tray-marked").addEventListener("click", () => addToTray(markedDesigns()));
  byId("chosen-to-tray").addEventListener("click", () => addToTray([...state.chosen].sort((a, b) => a - b)));
}
