// The look of the baseline and of each place in the tray: colour, dash and mark together.
// Colours of Okabe and Ito (2008, "Color universal design"; from memory).

const LOOKS = [
  { color: "#1b2430", dash: "solid", svg: "", marker: "diamond", width: 2.6 },
  { color: "#0072b2", dash: "10 3", svg: "10 3", marker: "circle", width: 2 },
  { color: "#d55e00", dash: "3 3", svg: "3 3", marker: "square", width: 2 },
  { color: "#009e73", dash: "12 3 3 3", svg: "12 3 3 3", marker: "triangle", width: 2 },
  { color: "#cc79a7", dash: "6 2 2 2 2 2", svg: "6 2 2 2 2 2", marker: "inverted_triangle", width: 2 },
  { color: "#56b4e9", dash: "18 5", svg: "18 5", marker: "hex", width: 2 },
  { color: "#b07d00", dash: "2 6", svg: "2 6", marker: "star", width: 2.4 },
];

function swatch(look) {
  const pen = { stroke: look.color, "stroke-width": 3, "stroke-dasharray": look.svg };
  return drawing(54, 10, ["line", { x1: 1, y1: 5, x2: 53, y2: 5, ...pen }]);
}

// The baseline and what is in the tray, each with its look.
function compared() {
  return [BASELINE, ...state.tray].map((k, slot) => ({ k, slot, look: LOOKS[slot] }));
}
