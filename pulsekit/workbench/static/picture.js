// A picture: axes, curves and cursor of one panel.
class Picture {
  constructor(bench, id) {
    this.bench = bench;
    this.id = id;
    this.stamp = null;
    this.domain = null;
    this.lastBands = {};
    this.heading = make("h3", {});
    this.legend = make("span", { class: "pk-legend" });
    this.reading = make("output", { class: "pk-reading" });
    this.canvas = make("canvas", { "aria-hidden": "true" });
    this.svg = draw("svg", { role: "img" });
    this.frame = draw("rect", { class: "pk-frame" });
    this.clip = draw("clipPath", { id: `pk-clip-${bench.key}-${id}` });
    this.clipBox = draw("rect");
    this.clip.append(this.clipBox);
    this.axes = draw("g");
    this.curves = draw("g", { "clip-path": `url(#pk-clip-${bench.key}-${id})` });
    this.over = draw("g", { class: "pk-over" });
    this.svg.append(this.clip, this.frame, this.axes, this.curves, this.over);
    this.plot = make("div", { class: "pk-plot", tabindex: "0" }, this.canvas, this.svg);
    this.root = make("section", { class: "pk-picture" }, make("header", {}, this.heading, this.legend, this.reading), this.plot);
    this.root.style.gridArea = id;
    this.listen();
    this.observer = new ResizeObserver(() => this.resized());
    this.observer.observe(this.plot);
  }

  resized() {
    const box = this.plot.getBoundingClientRect();
    if (!box.width || (Math.abs(box.width - this.width) < 0.5 && Math.abs(box.height - this.height) < 0.5)) return;
    this.width = box.width;
    this.height = box.height;
    const scale = window.devicePixelRatio || 1;
    this.canvas.width = Math.round(box.width * scale);
    this.canvas.height = Math.round(box.height * scale);
    this.svg.setAttribute("viewBox", `0 0 ${box.width} ${box.height}`);
    this.paint();
  }

  // panel: null clears the picture.
  show(panel, stale) {
    if (panel && panel.stamp === this.stamp && stale === this.stale) { this.panel = panel; return false; }
    this.panel = panel;
    this.stamp = panel ? panel.stamp : null;
    this.stale = stale;
    if (panel && !stale) this.lastBands = {};
    if (this.width) this.paint();
    return true;
  }

  px(value) { return this.left + ((value - this.x0) / (this.x1 - this.x0)) * (this.right - this.left); }
  py(value) { return this.foot - ((value - this.y0) / (this.y1 - this.y0)) * (this.foot - this.top); }
  placeOf(pixel) { return this.x0 + ((pixel - this.left) / (this.right - this.left)) * (this.x1 - this.x0); }

  extents() {
    let x0 = Infinity, x1 = -Infinity, y0 = Infinity, y1 = -Infinity;
    const grow = (values, axis) => {
      for (const value of values) {
        if (Number.isNaN(value)) continue;
        if (axis) { if (value < y0) y0 = value; if (value > y1) y1 = value; } else { if (value < x0) x0 = value; if (value > x1) x1 = value; }
      }
    };
    for (const series of this.panel.series) {
      const [a, b, c] = series.arrays;
      if (series.kind === "rule") grow(a, true);
      else if (series.kind === "stems") { grow(a); grow(b, true); grow(b.map((v, k) => v + (c[k] || 0)), true); }
      else if (series.kind === "band") { grow(a); grow(b, true); grow(c, true); }
      else if (series.kind === "line" || series.kind === "dots") { grow(a); grow(b, true); }
      else if (series.options.extent) { const [p, q, r, s] = series.options.extent; grow([p, q]); grow([r, s], true); }
    }
    return { x0, x1, y0, y1 };
  }

  // The vertical scale stays while the curves fit it and fill it, so that a slider moves curves and not axes.
  scale() {
    const { x, y } = this.panel;
    const found = this.extents();
    this.x0 = x.low ?? found.x0; this.x1 = x.high ?? found.x1;
    if (!(this.x1 > this.x0)) { this.x0 -= 0.5; this.x1 = this.x0 + 1; }
    if (y.low !== null && y.high !== null) { this.y0 = y.low; this.y1 = y.high; return; }
    let low = found.y0, high = found.y1;
    if (y.zero) { low = Math.min(low, 0); high = Math.max(high, 0); }
    if (!Number.isFinite(low)) { low = 0; high = 1; }
    if (!(high > low)) { low -= Math.abs(low) * 0.1 || 0.5; high += Math.abs(high) * 0.1 || 0.5; }
    const span = high - low, old = this.domain;
    if (!(old && old.label === y.label && low >= old.low && high <= old.high && span > 0.6 * (old.high - old.low))) {
      const step = niceStep(span * 1.04, 5);
      const headroom = y.zero && found.y0 >= 0 ? low : low - 0.02 * span;
      this.domain = { label: y.label, low: Math.floor(headroom / step + 1e-6) * step, high: Math.ceil((high + 0.03 * span) / step - 1e-6) * step };
    }
    this.y0 = this.domain.low; this.y1 = this.domain.high;
  }

  paint() {
    this.axes.replaceChildren(); this.curves.replaceChildren(); this.over.replaceChildren();
    this.spans = null;
    const pen = this.canvas.getContext("2d"), scale = window.devicePixelRatio || 1;
    pen.setTransform(scale, 0, 0, scale, 0, 0);
    pen.clearRect(0, 0, this.width, this.height);
    const panel = this.panel;
    this.root.classList.toggle("empty", !panel);
    if (!panel) { say(this.heading, this.bench.names[this.id] || this.id); this.legend.replaceChildren(); say(this.reading, ""); return; }
    const heat = panel.series.some((series) => series.kind === "heat");
    this.left = 50; this.right = this.width - (heat ? 50 : 10); this.top = 4; this.foot = this.height - 29;
    this.scale();
    say(this.heading, panel.title);
    this.svg.setAttribute("aria-label", `${panel.title}: ${panel.y.label} against ${panel.x.label}`);
    this.plot.setAttribute("aria-label", `${panel.title}. ${panel.x.link ? "Arrow keys move the cursor." : ""}`);
    for (const [box, clip] of [[this.frame, false], [this.clipBox, true]]) {
      box.setAttribute("x", this.left - (clip ? 1 : 0)); box.setAttribute("y", this.top);
      box.setAttribute("width", Math.max(this.right - this.left, 1) + (clip ? 2 : 0)); box.setAttribute("height", Math.max(this.foot - this.top, 1));
    }
    this.paintAxes(heat);
    this.paintLegend();
    for (const series of panel.series) if (painters[series.kind]) painters[series.kind](this, series);
    this.paintStale();
    this.moveCursor();
  }

  // While a new band is being computed the old one stays in the new scale, and fades.
  paintStale() {
    for (const series of this.panel.series) if (series.kind === "band" && !series.pale && series.name === "95 % band") this.lastBands[series.role] = series;
    if (!this.stale) return;
    if (this.panel.series.some((series) => series.kind === "band" && series.name === "95 % band")) return;
    for (const series of Object.values(this.lastBands)) {
      painters.band(this, series);
      const path = this.curves.lastChild;
      path.classList.add("stale");
      this.curves.prepend(path);
    }
  }

  paintAxes(bare) {
    const { x, y } = this.panel;
    const yTicks = ticksOf(this.y0, this.y1, between((this.foot - this.top) / 26, 2, 6));
    for (const value of yTicks.at) {
      const at = this.py(value);
      if (at < this.top - 1 || at > this.foot + 1) continue;
      if (!bare) this.axes.append(draw("path", { class: "pk-grid", d: `M${this.left} ${at.toFixed(1)}H${this.right}` }));
      const text = draw("text", { class: "pk-tick end", x: this.left - 5, y: between(at + 3.5, this.top + 7, this.foot + 4) });
      text.textContent = written(value, yTicks.decimals);
      this.axes.append(text);
    }
    const listed = x.ticks ? x.ticks.map(([at, text]) => ({ at, text })) : null;
    const xTicks = ticksOf(this.x0, this.x1, between((this.right - this.left) / 58, 2, 14));
    const whole = x.label === "Harmonic";
    const places = whole ? wholeTicks(this.x0, this.x1, (this.right - this.left) / 26) : xTicks.at;
    const marks = listed || places.map((at) => ({ at, text: written(at, whole ? 0 : xTicks.decimals) }));
    for (const { at, text: words } of marks) {
      const place = this.px(at);
      if (place < this.left - 1 || place > this.right + 1) continue;
      this.axes.append(draw("path", { class: "pk-notch", d: `M${place.toFixed(1)} ${this.foot}v3` }));
      const text = draw("text", { class: "pk-tick middle", x: between(place, this.left + 2, this.right - 6), y: this.foot + 13 });
      text.textContent = words;
      this.axes.append(text);
    }
    const under = draw("text", { class: "pk-label middle", x: (this.left + this.right) / 2, y: this.height - 3 });
    under.textContent = x.label;
    const beside = draw("text", { class: "pk-label middle", transform: `translate(10 ${(this.top + this.foot) / 2}) rotate(-90)` });
    beside.textContent = this.fitted(y.label, this.foot - this.top);
    this.axes.append(under, beside);
  }

  // A label longer than its axis keeps its unit: the words in front are cut.
  fitted(label, room) {
    const most = Math.floor(room / 5.4);
    if (label.length <= most) return label;
    const unit = label.match(/\([^)]*\)$/);
    return unit && unit[0].length + 4 < most ? `${label.slice(0, most - unit[0].length - 2)}… ${unit[0]}` : unit ? unit[0] : label.slice(0, most);
  }

  paintLegend() {
    const seen = new Set(), items = [];
    for (const series of this.panel.series) {
      if (!series.name || seen.has(series.name) || series.kind === "spans" || series.kind === "heat") continue;
      if (this.panel.series.length === 1) continue;
      seen.add(series.name);
      items.push(make("span", { class: "pk-key" }, make("i", { class: `swatch ${classOf(series)}` }), series.name));
    }
    if (this.panel.note) items.push(make("span", { class: "pk-note" }, this.panel.note));
    this.legend.replaceChildren(...items);
  }

  // Cursor

  cursorPlace() {
    const { link, starts, lengths } = this.panel.x;
    const cursor = this.bench.cursors.of(link);
    if (!cursor) return null;
    if (!starts.length) return cursor.value;
    const lap = between(cursor.lap || 0, 0, starts.length - 1);
    return starts[lap] + (cursor.value / (cursor.high - cursor.low || 1)) * lengths[lap];
  }

  moveCursor() {
    if (!this.panel || !this.width) return;
    this.over.replaceChildren();
    const parts = [];
    const place = this.panel.x.link ? this.cursorPlace() : null;
    if (place !== null) {
      const at = this.px(place);
      this.over.append(draw("path", { class: "pk-cursor", d: `M${at.toFixed(1)} ${this.top}V${this.foot}` }));
      for (const series of this.panel.series) {
        if (!series.reading) continue;
        const value = valueAt(series.arrays[0], series.arrays[1], place);
        if (!Number.isFinite(value)) continue;
        this.over.append(draw("circle", { class: `pk-bead role-${series.role}`, cx: at.toFixed(1), cy: this.py(value).toFixed(1), r: 3.2 }));
        parts.push(this.number(value) + this.unit());
      }
    }
    for (const series of this.panel.series) {
      if (series.kind !== "slice") continue;
      const heat = this.bench.seriesOf(...series.options.of), cursor = this.bench.cursors.of(series.options.link);
      if (!heat || !cursor) continue;
      const column = sliceAt(heat, cursor.value), [from, to] = heat.options.y;
      const x = column.map((_, row) => from + ((to - from) * row) / (column.length - 1));
      this.over.append(draw("path", { class: classOf(series), d: pathOf(this, x, column) }));
      if (series.options.reading === "centre") parts.push(`axis ${this.number(column[(column.length - 1) / 2])}${this.unit()}`);
    }
    say(this.reading, parts.join("  "));
  }

  unit() { const found = this.panel.y.label.match(/\(([^)]*)\)$/); return found ? ` ${found[1]}` : ""; }
  number(value) {
    const span = Math.max(Math.abs(this.y0), Math.abs(this.y1));
    return written(value, between(2 - Math.floor(Math.log10(span || 1)), 0, 6));
  }

  // Hand and keys

  listen() {
    let down = null;
    const place = (event) => this.placeOf(event.clientX - this.plot.getBoundingClientRect().left);
    this.plot.addEventListener("pointerdown", (event) => {
      if (!this.panel || event.button !== 0) return;
      down = { x: event.clientX, moved: false };
      this.plot.setPointerCapture(event.pointerId);
      if (!this.panel.click) this.drag(place(event));
    });
    this.plot.addEventListener("pointermove", (event) => {
      if (!down) return;
      if (Math.abs(event.clientX - down.x) > 4) down.moved = true;
      if (down.moved || !this.panel.click) this.drag(place(event));
    });
    this.plot.addEventListener("pointerup", (event) => {
      if (down && !down.moved && this.panel.click) this.clicked(place(event));
      if (down) this.bench.cursors.tell();
      down = null;
    });
    this.plot.addEventListener("pointercancel", () => { down = null; });
    this.plot.addEventListener("keydown", (event) => this.key(event));
  }

  drag(place) {
    const { link, starts, lengths } = this.panel.x;
    const cursor = this.bench.cursors.of(link);
    if (!cursor) return;
    if (!starts.length) { this.bench.cursors.set(link, place); return; }
    let lap = 0;
    while (lap + 1 < starts.length && starts[lap + 1] <= place) lap++;
    cursor.lap = lap;
    this.bench.cursors.set(link, cursor.low + between((place - starts[lap]) / lengths[lap], 0, 1) * (cursor.high - cursor.low));
  }

  clicked(place) {
    if (!this.spans) return;
    for (let k = 0; k < this.spans.start.length; k++) {
      if (place >= this.spans.start[k] && place < this.spans.end[k]) { this.bench.ask({ do: this.panel.click, number: k + 1 }); return; }
    }
  }

  key(event) {
    if (!this.panel) return;
    const link = this.panel.x.link || (this.panel.series.find((series) => series.kind === "slice") || { options: {} }).options.link;
    if (!link) return;
    const big = event.shiftKey ? 8 : 1;
    const cursor = this.bench.cursors.of(link);
    const laps = this.panel.x.starts.length;
    if (event.key === "ArrowRight") this.bench.cursors.step(link, big);
    else if (event.key === "ArrowLeft") this.bench.cursors.step(link, -big);
    else if (event.key === "Home") this.bench.cursors.set(link, cursor.low);
    else if (event.key === "End") this.bench.cursors.set(link, cursor.high);
    else if (event.key === " " && cursor.plays) this.bench.cursors.toggle(link);
    else if (laps && event.key === "PageDown") { cursor.lap = between((cursor.lap || 0) + 1, 0, laps - 1); this.bench.cursors.changed(link); }
    else if (laps && event.key === "PageUp") { cursor.lap = between((cursor.lap || 0) - 1, 0, laps - 1); this.bench.cursors.changed(link); }
    else if (this.panel.click && event.key === "Enter") this.clicked(this.cursorPlace() + 1e-9);
    else return;
    event.preventDefault();
  }
}
