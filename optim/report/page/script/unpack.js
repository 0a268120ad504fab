// Numbers that travel as text become arrays again.

function unpack(packed) {
  const bytes = Uint8Array.from(atob(packed.f4), (sign) => sign.charCodeAt(0));
  return new Float32Array(bytes.buffer);
}

// Rows along the last axis.
function unpackRows(packed) {
  const flat = unpack(packed);
  const length = packed.shape.at(-1);
  return Array.from({ length: length ? flat.length / length : 0 }, (_, k) =>
    flat.subarray(k * length, (k + 1) * length),
  );
}
