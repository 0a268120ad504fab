// The shown designs: their columns by key, their names, what they are.

const columns = new Map(
  page.columns.map((column) => [column.key, { ...column, values: unpack(column.values) }]),
);

const value = (key, k) => columns.get(key).values[k];

const designName = (k) => (k === BASELINE ? `baseline, #${page.designs.id[k]}` : `#${page.designs.id[k]}`);

const marksOf = (k) => page.designs.marks[k] ?? [];

const kindWords = { front: "front", beaten: "beaten", missed: "misses a limit" };

function about(k) {
  return [kindWords[page.designs.kind[k]], ...marksOf(k)].join(", ");
}

// The mark of a design in every plot.
function markOf(k) {
  if (k === BASELINE) return "baseline";
  const marks = marksOf(k);
  if (marks.includes("knee")) return "knee";
  if (marks.length) return "extreme";
  return page.designs.kind[k];
}

// Plots draw what comes last on top: there the baseline and the front come last.
const flip = (k) => count - 1 - k;

const flipped = (values) => Array.from(values).reverse();
