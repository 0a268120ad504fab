// What the page holds, what the designer has chosen, and who wants to know when that changes.

const page = JSON.parse(document.getElementById("document").textContent);
const count = page.designs.id.length;
const BASELINE = 0;

const state = {
  across: null,
  up: null,
  colour: null,
  beaten: false,
  missed: page.front_size === 0,
  limits: new Map(),
  visible: new Array(count).fill(true),
  chosen: new Set(),
  onlyChosen: false,
  tray: [],
  notes: {},
  sort: { key: null, falling: true },
};

const listeners = new Map();

// Subjects: axes, limits, visible, chosen, tray, look.
function on(subject, listener) {
  listeners.set(subject, [...(listeners.get(subject) ?? []), listener]);
}

function changed(subject) {
  for (const listener of listeners.get(subject) ?? []) listener();
}
