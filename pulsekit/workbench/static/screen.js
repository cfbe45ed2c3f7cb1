// The page of a workbench: givens, pictures, answer; and the talk with the kernel.
let benches = 0;

class Bench {
  constructor(model, host) {
    this.model = model;
    this.key = ++benches;
    this.desk = model.get("desk");
    this.names = this.desk.names;
    this.panels = {};
    this.pictures = {};
    this.status = model.get("status");
    this.turn = 0;
    this.waiting = null;
    this.colours = colourTable(this.desk.field_stops);
    this.cursors = new Cursors(this, this.desk.cursors);
    this.givens = new Givens(this);
    this.answer = new AnswerPane(this);
    this.build(host);
    this.onChange = () => this.refresh();
    this.onMessage = (message, buffers) => this.told(message, buffers);
    model.on("change", this.onChange);
    model.on("msg:custom", this.onMessage);
    this.watchTheme();
    this.refresh();
  }

  build(host) {
    this.host = host;
    this.busy = make("span", { class: "pk-busy", role: "status" });
    this.bar = make("progress", { max: 1, "aria-label": "Progress" });
    this.stop = make("button", { type: "button", class: "pk-small", onclick: () => this.ask({ do: "stop" }) }, "Stop");
    this.undo = make("button", { type: "button", class: "pk-small", onclick: () => this.ask({ do: "undo" }) }, "Undo");
    this.notice = make("p", { class: "pk-notice", role: "alert" });
    this.stand = make("span", { class: "pk-behind" }, "Pictures and answer show the last case that could be answered");
    const tools = make("div", { class: "pk-tools", role: "toolbar", "aria-label": "Cursor and state" }, ...this.cursors.bars,
      make("span", { class: "pk-spring" }), this.stand, this.busy, this.bar, this.stop, this.undo);
    const grid = make("div", { class: "pk-grid-of-pictures" });
    grid.style.gridTemplateAreas = this.desk.rows.map((row) => `"${row}"`).join(" ");
    this.areas = [...new Set(this.desk.rows.join(" ").split(/\s+/))];
    for (const id of this.areas) {
      this.pictures[id] = new Picture(this, id);
      grid.append(this.pictures[id].root);
    }
    grid.style.gridTemplateRows = `repeat(${this.desk.rows.length}, minmax(0, 1fr))`;
    this.cautions = make("footer", { class: "pk-cautions" });
    const middle = make("main", { class: "pk-middle" }, tools, grid);
    const left = make("aside", { class: "pk-left", "aria-label": "Givens" }, make("h2", {}, this.desk.title), this.notice, this.givens.root);
    this.root = make("div", { class: "pk", "data-kind": this.desk.kind }, left, middle, this.answer.root, this.cautions);
    this.root.addEventListener("dragover", (event) => { event.preventDefault(); this.root.classList.add("dropping"); });
    this.root.addEventListener("dragleave", (event) => { if (event.target === this.root) this.root.classList.remove("dropping"); });
    this.root.addEventListener("drop", (event) => {
      event.preventDefault();
      this.root.classList.remove("dropping");
      if (event.dataTransfer.files.length) this.upload(event.dataTransfer.files[0]);
    });
    host.append(this.root);
    this.fitHeight();
    // The output area gets its place and padding after this.
    for (const wait of [0, 150, 600, 2000]) setTimeout(() => this.root.isConnected && this.fitHeight(), wait);
    this.onResize = () => this.fitHeight();
    window.addEventListener("resize", this.onResize);
    this.widths = new ResizeObserver(() => this.fitHeight());
    this.widths.observe(host);
  }

  // As tall as the window leaves room for, so that every picture is in view without scrolling.
  fitHeight() {
    const lab = document.querySelector(".jp-LabShell, .jp-NotebookShell");
    const outer = lab ? this.root.closest(".jp-WindowedPanel-outer, .jp-NotebookPanel-notebook") : null;
    const above = this.root.getBoundingClientRect().top + window.scrollY;
    const room = outer ? outer.getBoundingClientRect().height - 12 : window.innerHeight - Math.min(above, 40) - 8;
    const width = this.root.clientWidth;
    if (width) {
      this.root.classList.toggle("narrow", width < 1330);
      this.root.classList.toggle("tight", width < 1030);
    }
    this.root.style.setProperty("--tall", `${Math.max(room, 620)}px`);
  }

  watchTheme() {
    const set = () => {
      this.root.classList.toggle("dark", isDark(this.root));
    };
    set();
    this.themes = new MutationObserver(set);
    this.themes.observe(document.body, { attributes: true, attributeFilter: ["data-jp-theme-light", "class", "style"] });
  }

  // One message of the kernel, one redraw of what it changed.
  refresh() {
    const model = this.model, scene = model.get("scene"), status = model.get("status");
    this.status = status;
    if (scene !== this.lastScene) {
      this.lastScene = scene;
      this.showScene(scene, model.get("numbers"), status);
    }
    const givens = model.get("givens"), answer = model.get("answer");
    if (givens !== this.lastGivens) { this.lastGivens = givens; this.givens.show(givens); }
    if (answer !== this.lastAnswer) { this.lastAnswer = answer; this.answer.show(answer); this.showCautions(answer.cautions); }
    this.showStatus(status);
    if (status.echo >= this.turn) this.release();
  }

  showScene(scene, raw, status) {
    const numbers = new Float32Array(raw.buffer.slice(raw.byteOffset, raw.byteOffset + raw.byteLength));
    const panels = scene.map((panel) => ({
      ...panel, series: panel.series.map((series) => ({ ...series, arrays: series.at.map(([first, count]) => numbers.subarray(first, first + count)) })),
    }));
    this.panels = Object.fromEntries(panels.map((panel) => [panel.id, panel]));
    this.cursors.fit(panels);
    let redrawn = 0;
    for (const id of this.areas) if (this.pictures[id].show(this.panels[id] || null, !status.full)) redrawn += 1;
    // A slice follows its heat, even where the panel that holds it did not change.
    for (const picture of Object.values(this.pictures)) picture.moveCursor();
    this.redraws = (this.redraws || 0) + 1;
    this.root.dataset.redraws = String(this.redraws);
    this.root.dataset.pictures = String(redrawn);
  }

  seriesOf(id, place) {
    const panel = this.panels[id];
    return panel ? panel.series[place] : null;
  }

  showCautions(texts) {
    const text = texts.join(" ");
    say(this.cautions, text);
    this.cautions.title = text;
  }

  showStatus(status) {
    say(this.busy, status.busy);
    this.bar.hidden = status.progress === null || status.progress === undefined;
    if (!this.bar.hidden) this.bar.value = status.progress;
    this.stop.hidden = !status.busy;
    this.undo.disabled = !status.can_undo;
    this.stand.hidden = !status.behind;
    say(this.notice, status.notice || "");
    this.notice.hidden = !status.notice;
    this.root.dataset.serial = String(status.serial);
    this.root.dataset.full = String(status.full);
    this.root.dataset.busy = status.busy ? "yes" : "no";
    this.answer.status(status);
  }

  told(message, buffers) {
    if (message && message.saved) this.answer.tellSaved(message.saved, buffers[0]);
  }

  ask(what) {
    this.turn += 1;
    this.model.send({ ...what, turn: this.turn }, undefined, []);
  }

  // A hand is quicker than a kernel: while one step is under way only the newest waits.
  slide(key, number, gesture) {
    const asked = { do: "slide", key, number, gesture };
    if (this.underWay && performance.now() - this.underWay < 1500) { this.waiting = asked; return; }
    this.underWay = performance.now();
    this.ask(asked);
  }

  release() {
    this.underWay = 0;
    if (this.waiting) {
      const next = this.waiting;
      this.waiting = null;
      this.slide(next.key, next.number, next.gesture);
    }
  }

  async upload(file) {
    const piece = 1 << 20, count = Math.max(1, Math.ceil(file.size / piece));
    for (let index = 0; index < count; index++) {
      const part = await file.slice(index * piece, (index + 1) * piece).arrayBuffer();
      this.turn += 1;
      this.model.send({ do: "part", name: file.name, index, count, turn: this.turn }, undefined, [part]);
    }
  }

  close() {
    this.model.off("change", this.onChange);
    this.model.off("msg:custom", this.onMessage);
    this.themes.disconnect();
    this.widths.disconnect();
    window.removeEventListener("resize", this.onResize);
    for (const picture of Object.values(this.pictures)) picture.observer.disconnect();
  }
}

// 256 colours between the stops, as a flat table of red, green, blue.
function colourTable(stops) {
  const parsed = stops.map(([at, colour]) => [at, [1, 3, 5].map((k) => parseInt(colour.slice(k, k + 2), 16))]);
  const table = new Uint8ClampedArray(256 * 3);
  for (let k = 0; k < 256; k++) {
    const at = k / 255;
    let upper = parsed.findIndex(([place]) => place >= at);
    upper = Math.max(upper, 1);
    const [a, from] = parsed[upper - 1], [b, to] = parsed[upper], part = (at - a) / (b - a);
    for (let c = 0; c < 3; c++) table[3 * k + c] = from[c] + part * (to[c] - from[c]);
  }
  return table;
}

export default {
  render({ model, el }) {
    const bench = new Bench(model, el);
    return () => bench.close();
  },
};
