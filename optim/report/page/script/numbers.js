// Numbers as they are read.

function shown(value, digits = 4) {
  if (value === null || !Number.isFinite(value)) return "-";
  return Number(value.toPrecision(digits)).toString().replace("-", "\u2212");
}

function signed(value, digits = 3) {
  if (value === null || !Number.isFinite(value)) return "-";
  return (value > 0 ? "+" : "") + shown(value, digits);
}

function withUnit(column) {
  return column.unit ? `${column.label} [${column.unit}]` : column.label;
}
