// The cursors of the page: each joins all pictures whose axis carries its link. They need no kernel.
class Cursors {
  constructor(bench, table) {
    this.bench = bench;
    this.all = {};
    for (const [link, row] of Object.entries(table)) this.all[link] = { ...row, value: 0, low: 0, high: 1, playing: false, slowness: 5, lap: 0 };
    this.bars = Object.entries(this.all).map(([link, cursor]) => this.bar(link, cursor));
  }

  of(link) { return this.all[link]; }

  // The ends of a cursor are those of the first picture that carries it over one stretch.
  fit(panels) {
    for (const [link, cursor] of Object.entries(this.all)) {
      const panel = panels.find((entry) => entry.x.link === link && !entry.x.starts.length && entry.x.high !== null);
      if (!panel) continue;
      const part = cursor.fitted ? (cursor.value - cursor.low) / (cursor.high - cursor.low || 1) : (cursor.start ?? 0.2);
      if (panel.x.low === cursor.low && panel.x.high === cursor.high && cursor.fitted) continue;
      cursor.low = panel.x.low; cursor.high = panel.x.high; cursor.fitted = true;
      cursor.value = cursor.low + part * (cursor.high - cursor.low);
      cursor.slider.min = cursor.low; cursor.slider.max = cursor.high; cursor.slider.step = (cursor.high - cursor.low) / cursor.steps;
      this.changed(link, true);
    }
  }

  set(link, value, quiet) {
    const cursor = this.all[link];
    cursor.value = between(value, cursor.low, cursor.high);
    this.changed(link, quiet);
  }

  step(link, count) {
    const cursor = this.all[link], size = (cursor.high - cursor.low) / cursor.steps;
    let value = (Math.round((cursor.value - cursor.low) / size) + count) * size;
    const span = cursor.high - cursor.low;
    if (cursor.plays) value = ((value % span) + span) % span;
    this.set(link, cursor.low + value);
    this.tell();
  }

  changed(link) {
    const cursor = this.all[link];
    cursor.slider.value = cursor.value;
    say(cursor.readout, `${written(cursor.value, 3)} ${cursor.unit}`);
    for (const picture of Object.values(this.bench.pictures)) if (this.concerns(picture, link)) picture.moveCursor();
    if (this.bench.onCursor) this.bench.onCursor(link, cursor);
  }

  concerns(picture, link) {
    const panel = picture.panel;
    return panel && (panel.x.link === link || panel.series.some((series) => series.options && series.options.link === link));
  }

  toggle(link) {
    const cursor = this.all[link];
    cursor.playing = !cursor.playing;
    say(cursor.button, cursor.playing ? "❚❚ Pause" : "▶ Play");
    if (!cursor.playing) { this.tell(); return; }
    let last = performance.now();
    const tick = (now) => {
      if (!cursor.playing || !this.bench.root.isConnected) return;
      const span = cursor.high - cursor.low;
      this.set(link, cursor.low + (((cursor.value - cursor.low + (now - last) / 1000 / cursor.slowness) % span) + span) % span);
      last = now;
      requestAnimationFrame(tick);
    };
    requestAnimationFrame(tick);
  }

  bar(link, cursor) {
    cursor.slider = make("input", {
      type: "range", min: 0, max: 1, step: 0.01, "aria-label": `${cursor.label} under the cursor`, class: "pk-cursor-slider",
      oninput: () => this.set(link, Number(cursor.slider.value)), onchange: () => this.tell(),
    });
    cursor.readout = make("output", { class: "pk-cursor-readout" });
    const parts = [make("label", { class: "pk-cursor-label" }, cursor.label, " ", cursor.slider), cursor.readout];
    if (cursor.plays) {
      cursor.button = make("button", { type: "button", class: "pk-play", onclick: () => this.toggle(link) }, "▶ Play");
      const slow = make("select", { "aria-label": "Slowness of play", onchange: (event) => { cursor.slowness = Number(event.target.value); } });
      for (const [value, words] of [[1, "as it was"], [2, "2 × slower"], [5, "5 × slower"], [20, "20 × slower"]]) {
        slow.append(make("option", { value: String(value), selected: value === 5 }, words));
      }
      slow.value = "5";
      parts.push(cursor.button, slow);
    }
    return make("div", { class: "pk-cursor-bar" }, ...parts);
  }

  // The kernel is told when a hand leaves the cursor, so that a saved notebook remembers it.
  tell() {
    const places = {};
    for (const [link, cursor] of Object.entries(this.all)) places[link] = cursor.value;
    this.bench.model.set("cursor", places);
    this.bench.model.save_changes();
  }
}
