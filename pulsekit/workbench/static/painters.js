// One painter per kind of series. Each gets the picture (scales, layers) and the series with its arrays.
const painters = {};

function pathOf(picture, x, y) {
  let text = "", pen = "M";
  for (let k = 0; k < x.length; k++) {
    if (Number.isNaN(x[k]) || Number.isNaN(y[k])) { pen = "M"; continue; }
    text += pen + picture.px(x[k]).toFixed(1) + " " + picture.py(y[k]).toFixed(1);
    pen = "L";
  }
  return text;
}

function classOf(series) {
  return `pk-${series.kind} role-${series.role.replace("_", "-")}` + (series.pale ? " pale" : "") + (series.dash ? " dash" : "") + (series.thin ? " thin" : "");
}

painters.line = (picture, series) => {
  const [x, y] = series.arrays;
  picture.curves.append(draw("path", { class: classOf(series), d: pathOf(picture, x, y), "data-name": series.name }));
};

painters.band = (picture, series) => {
  const [x, low, high] = series.arrays;
  let text = "";
  for (let k = 0; k < x.length; k++) text += (k ? "L" : "M") + picture.px(x[k]).toFixed(1) + " " + picture.py(high[k]).toFixed(1);
  for (let k = x.length - 1; k >= 0; k--) text += "L" + picture.px(x[k]).toFixed(1) + " " + picture.py(low[k]).toFixed(1);
  if (text) picture.curves.append(draw("path", { class: classOf(series), d: text + "Z" }));
};

painters.stems = (picture, series) => {
  const [x, y, error] = series.arrays;
  const wide = between((picture.px(2) - picture.px(1)) * 0.5, 2, 14);
  let bars = "", whiskers = "";
  for (let k = 0; k < x.length; k++) {
    const at = picture.px(x[k]), top = picture.py(y[k]), foot = picture.py(0);
    bars += `M${(at - wide / 2).toFixed(1)} ${foot.toFixed(1)}V${top.toFixed(1)}H${(at + wide / 2).toFixed(1)}V${foot.toFixed(1)}Z`;
    if (!Number.isNaN(error[k])) whiskers += `M${at.toFixed(1)} ${picture.py(y[k] - error[k]).toFixed(1)}V${picture.py(y[k] + error[k]).toFixed(1)}`;
  }
  picture.curves.append(draw("path", { class: classOf(series), d: bars }));
  picture.curves.append(draw("path", { class: "pk-whisker", d: whiskers }));
};

painters.dots = (picture, series) => {
  const [x, y] = series.arrays;
  for (let k = 0; k < x.length; k++) {
    if (Number.isNaN(y[k])) continue;
    picture.curves.append(draw("circle", { class: classOf(series), cx: picture.px(x[k]), cy: picture.py(y[k]), r: 3 }));
  }
};

painters.rule = (picture, series) => {
  const at = picture.py(series.arrays[0][0]);
  if (at < picture.top - 0.5 || at > picture.foot + 0.5) return;
  picture.curves.append(draw("path", { class: classOf(series), d: `M${picture.left} ${at.toFixed(1)}H${picture.right}` }));
};

painters.spans = (picture, series) => {
  const [start, end] = series.arrays, states = series.options.states || [];
  for (let k = 0; k < start.length; k++) {
    const from = picture.px(start[k]), to = picture.px(end[k]);
    const out = Boolean(states[k]);
    const box = draw("rect", {
      class: "pk-span" + (out ? " out" : "") + (k % 2 ? " odd" : ""), x: from.toFixed(1), y: picture.top, width: Math.max(to - from, 0.5).toFixed(1),
      height: picture.foot - picture.top,
    });
    const hint = draw("title");
    hint.textContent = series.options.hints ? series.options.hints[k] : out ? `Cycle ${k + 1} is not used: ${states[k]}. Click to use it.` : `Cycle ${k + 1}. Click to leave it out.`;
    box.append(hint);
    picture.curves.append(box);
    if (to - from > 16) {
      const label = draw("text", { class: "pk-span-number" + (out ? " out" : ""), x: ((from + to) / 2).toFixed(1), y: picture.top + 9 });
      label.textContent = series.options.labels ? series.options.labels[k] : (out ? "✕ " : "") + (k + 1);
      picture.curves.append(label);
    }
  }
  picture.spans = { start, end };
};

painters.heat = (picture, series) => {
  const { rows, columns, x, y } = series.options, values = series.arrays[0];
  let greatest = 0;
  for (const value of values) if (Math.abs(value) > greatest) greatest = Math.abs(value);
  greatest = greatest || 1;
  const image = new ImageData(columns, rows), table = picture.bench.colours;
  for (let row = 0; row < rows; row++) {
    const from = (rows - 1 - row) * columns;
    for (let column = 0; column < columns; column++) {
      const shade = Math.round((values[from + column] / greatest) * 127.5 + 127.5) * 3, at = 4 * (row * columns + column);
      image.data[at] = table[shade]; image.data[at + 1] = table[shade + 1]; image.data[at + 2] = table[shade + 2]; image.data[at + 3] = 255;
    }
  }
  const sheet = picture.sheet || (picture.sheet = document.createElement("canvas"));
  sheet.width = columns; sheet.height = rows;
  sheet.getContext("2d").putImageData(image, 0, 0);
  const pen = picture.canvas.getContext("2d");
  pen.imageSmoothingEnabled = true;
  const from = picture.px(x[0]), to = picture.px(x[1]), top = picture.py(y[1]), foot = picture.py(y[0]);
  pen.drawImage(sheet, 0.5, 0.5, columns - 1, rows - 1, from, top, to - from, foot - top);
  zeroLine(picture, series);
  colourScale(picture, greatest);
};

// Where the flow turns: a thin line at zero, column by column.
function zeroLine(picture, series) {
  const { rows, columns, x, y } = series.options, values = series.arrays[0];
  let text = "";
  const sx = (x[1] - x[0]) / (columns - 1), sy = (y[1] - y[0]) / (rows - 1);
  for (let row = 1; row < rows - 2; row++) {
    for (let column = 0; column < columns - 1; column++) {
      const a = values[row * columns + column], b = values[(row + 1) * columns + column];
      const c = values[row * columns + column + 1], d = values[(row + 1) * columns + column + 1];
      const crossings = [];
      if (a * b < 0) crossings.push([0, a / (a - b)]);
      if (c * d < 0) crossings.push([1, c / (c - d)]);
      if (a * c < 0) crossings.push([a / (a - c), 0]);
      if (b * d < 0) crossings.push([b / (b - d), 1]);
      if (crossings.length < 2) continue;
      const [p, q] = crossings;
      const at = ([u, v]) => `${picture.px(x[0] + (column + u) * sx).toFixed(1)} ${picture.py(y[0] + (row + v) * sy).toFixed(1)}`;
      text += `M${at(p)}L${at(q)}`;
    }
  }
  if (text) picture.curves.append(draw("path", { class: "pk-zero", d: text }));
}

function colourScale(picture, greatest) {
  const pen = picture.canvas.getContext("2d"), table = picture.bench.colours;
  const left = picture.right + 8, wide = 8, tall = picture.foot - picture.top;
  for (let k = 0; k < tall; k++) {
    const shade = Math.round(255 * (1 - k / tall)) * 3;
    pen.fillStyle = `rgb(${table[shade]},${table[shade + 1]},${table[shade + 2]})`;
    pen.fillRect(left, picture.top + k, wide, 1.5);
  }
  const { at, decimals } = ticksOf(-greatest, greatest, 4);
  for (const value of at) {
    const text = draw("text", { class: "pk-tick", x: left + wide + 3, y: picture.top + tall * (0.5 - value / greatest / 2) + 3 });
    text.textContent = written(value, decimals);
    picture.axes.append(text);
  }
}

// A column of a heat at the cursor; painted with the cursor, so it needs no kernel.
painters.slice = () => {};

function sliceAt(heat, place) {
  const { rows, columns, x } = heat.options, values = heat.arrays[0];
  const at = between(((place - x[0]) / (x[1] - x[0])) * (columns - 1), 0, columns - 1);
  const column = Math.min(Math.floor(at), columns - 2), part = at - column;
  const out = new Float32Array(rows);
  for (let row = 0; row < rows; row++) out[row] = (1 - part) * values[row * columns + column] + part * values[row * columns + column + 1];
  return out;
}

function valueAt(x, y, place) {
  let low = 0, high = x.length - 1;
  if (!(high > 0)) return NaN;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (x[middle] > place) high = middle; else low = middle;
  }
  const part = (place - x[low]) / (x[high] - x[low]);
  return (1 - part) * y[low] + part * y[high];
}
