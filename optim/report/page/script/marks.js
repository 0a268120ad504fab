// One shape for each kind of design, the same in plots, table and legend.

const MARKS = {
  baseline: { marker: "diamond", size: 13, words: "baseline (ringed)", points: "7,0 14,7 7,14 0,7" },
  front: { marker: "circle", size: 11, words: "front", round: true },
  knee: { marker: "star", size: 19, words: "knee", points: "7,0 9,5 14,5 10,8.5 11.5,14 7,10.5 2.5,14 4,8.5 0,5 5,5" },
  extreme: { marker: "triangle", size: 14, words: "best in one objective", points: "7,1 14,13 0,13" },
  beaten: { marker: "square", size: 7, words: "feasible, beaten", points: "3,3 11,3 11,11 3,11" },
  missed: { marker: "circle_x", size: 9, words: "misses a limit", cross: true },
};

function markDrawing(kind) {
  const mark = MARKS[kind];
  const pen = { fill: "none", stroke: "#1b2430", "stroke-width": 1.4 };
  if (mark.round) return drawing(14, 14, ["circle", { cx: 7, cy: 7, r: 5.5, ...pen }]);
  if (mark.cross) {
    const cross = ["path", { d: "M3.5 3.5 L10.5 10.5 M10.5 3.5 L3.5 10.5", ...pen }];
    return drawing(14, 14, ["circle", { cx: 7, cy: 7, r: 5, ...pen }], cross);
  }
  return drawing(14, 14, ["polygon", { points: mark.points, ...pen }]);
}

function drawLegend() {
  const present = new Set(Array.from({ length: count }, (_, k) => markOf(k)));
  const kinds = Object.keys(MARKS).filter((kind) => present.has(kind));
  byId("legend").replaceChildren(
    ...kinds.map((kind) => element("li", {}, markDrawing(kind), MARKS[kind].words)),
  );
}
