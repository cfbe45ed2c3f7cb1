// The fields on the left. Nodes stay while the structure stays, so that focus and caret are never lost.
class Givens {
  constructor(bench) {
    this.bench = bench;
    this.root = make("form", { class: "pk-givens", "aria-label": "Givens", onsubmit: (event) => event.preventDefault() });
    this.groups = new Map();
    this.signature = "";
  }

  show(groups) {
    const signature = JSON.stringify(groups.map((group) => [group.id, group.items.map((item) => [item.key, item.type, item.label, item.has_spread])]));
    if (signature !== this.signature) this.build(groups);
    this.signature = signature;
    groups.forEach((group) => {
      const kept = this.groups.get(group.id);
      if (group.items.some((item) => item.error)) kept.details.open = true;
      group.items.forEach((item, place) => kept.rows[place].update(item));
    });
  }

  build(groups) {
    const focused = document.activeElement && this.root.contains(document.activeElement) ? document.activeElement.dataset.key : null;
    const old = this.groups;
    this.groups = new Map();
    this.root.replaceChildren(...groups.map((group) => {
      const before = old.get(group.id);
      const rows = group.items.map((item) => {
        const same = before && before.rows.find((row) => row.key === item.key && row.type === item.type && row.spread === item.has_spread && row.label === item.label);
        return same || this.row(item);
      });
      const details = make("details", { class: "pk-group", open: before ? before.details.open : group.open },
        make("summary", {}, group.title), ...rows.map((row) => row.node));
      this.groups.set(group.id, { details, rows });
      return details;
    }));
    if (focused) {
      const again = this.root.querySelector(`[data-key="${CSS.escape(focused)}"]`);
      if (again) again.focus();
    }
  }

  row(item) {
    const maker = fieldMakers[item.type] || fieldMakers.text;
    return Object.assign(maker(this.bench, item), { key: item.key, type: item.type, spread: item.has_spread, label: item.label });
  }
}

const fieldMakers = {};

function messageUnder(input, key) {
  const id = `pk-message-${Math.random().toString(36).slice(2)}`;
  const node = make("p", { class: "pk-message", id, role: "alert" });
  input.setAttribute("aria-describedby", id);
  return { node, update(text) { say(node, text || ""); node.hidden = !text; input.toggleAttribute("aria-invalid", Boolean(text)); } };
}

// A field is not written over while a hand is in it.
function fill(input, value) {
  if (input.dataset.dirty !== "yes" && input.value !== value) input.value = value;
}

function typed(input, commit) {
  input.addEventListener("input", () => { input.dataset.dirty = "yes"; });
  input.addEventListener("change", () => { delete input.dataset.dirty; commit(); });
  input.addEventListener("keydown", (event) => {
    if (event.key === "Enter") { event.preventDefault(); if (input.dataset.dirty) { delete input.dataset.dirty; commit(); } }
    if (event.key === "Escape" && input.dataset.dirty) { delete input.dataset.dirty; input.value = input.dataset.last || ""; }
  });
}

function labelled(item, input, extra) {
  return make("label", { class: "pk-label-row", title: item.help || "" }, make("span", { class: "pk-name" }, item.label), input, extra);
}

fieldMakers.text = (bench, item) => {
  const input = make("input", { type: "text", class: "pk-input", spellcheck: "false", autocomplete: "off", "data-key": item.key });
  const message = messageUnder(input);
  typed(input, () => bench.ask({ do: "set", key: item.key, text: input.value }));
  return {
    node: make("div", { class: "pk-field" }, labelled(item, input), message.node),
    update(now) { fill(input, now.value); input.dataset.last = now.value; input.placeholder = now.hint || ""; message.update(now.error); },
  };
};

fieldMakers.choice = (bench, item) => {
  const input = make("select", { class: "pk-input", "data-key": item.key });
  const message = messageUnder(input);
  let listed = "";
  input.addEventListener("change", () => bench.ask({ do: "set", key: item.key, text: input.value }));
  return {
    node: make("div", { class: "pk-field" }, labelled(item, input), message.node),
    update(now) {
      const options = JSON.stringify(now.options);
      if (options !== listed) input.replaceChildren(...now.options.map(([value, words]) => make("option", { value }, words)));
      listed = options;
      if (input.value !== now.value) input.value = now.value;
      message.update(now.error);
    },
  };
};

fieldMakers.quantity = (bench, item) => {
  const input = make("input", { type: "text", class: "pk-input", spellcheck: "false", autocomplete: "off", "data-key": item.key });
  const spread = item.has_spread
    ? make("input", { type: "text", class: "pk-input pk-spread", spellcheck: "false", autocomplete: "off", "data-key": `${item.key} ±`, "aria-label": `${item.label}: standard uncertainty`, placeholder: "exact" })
    : null;
  const message = messageUnder(input);
  const si = make("span", { class: "pk-si" });
  const slider = make("input", { type: "range", class: "pk-slider", "data-key": `${item.key} slider`, "aria-label": `${item.label}, slider` });
  const commit = () => {
    const tail = spread && spread.value.trim() && input.value.trim() && !/±|\+\/?-/.test(input.value) ? ` ± ${spread.value.trim()}` : "";
    bench.ask({ do: "set", key: item.key, text: input.value.trim() + tail });
  };
  typed(input, commit);
  if (spread) typed(spread, commit);
  let gesture = 0, slides = item.key, holding = false;
  slider.addEventListener("pointerdown", () => { gesture += 1; holding = true; });
  slider.addEventListener("focus", () => { gesture += 1; });
  for (const name of ["pointerup", "blur", "change"]) slider.addEventListener(name, () => { holding = false; });
  slider.addEventListener("input", () => { holding = true; bench.slide(slides, Number(slider.value), `g${gesture}`); });
  const values = spread ? make("span", { class: "pk-pair" }, input, make("span", { class: "pk-plus", "aria-hidden": "true" }, "±"), spread) : input;
  return {
    node: make("div", { class: "pk-field" }, labelled(item, values), slider, si, message.node),
    update(now) {
      fill(input, now.value); input.dataset.last = now.value;
      input.placeholder = now.derived || now.hint || "";
      input.classList.toggle("derived", Boolean(now.derived));
      if (spread) { fill(spread, now.spread); spread.dataset.last = now.spread; spread.disabled = !now.value && Boolean(now.derived); }
      say(si, now.si ? `= ${now.si}` : "");
      si.hidden = !now.si;
      slides = now.slides || item.key;
      slider.hidden = !now.slider;
      if (now.slider) {
        slider.min = now.slider.low; slider.max = now.slider.high; slider.step = now.slider.step;
        if (!holding) slider.value = now.slider.at;
      }
      message.update(now.error);
    },
  };
};

fieldMakers.file = (bench, item) => {
  const chooser = make("input", { type: "file", class: "pk-file", "data-key": `${item.key} chooser`, "aria-label": `${item.label}: choose a file` });
  chooser.addEventListener("change", () => { if (chooser.files.length) bench.upload(chooser.files[0]); chooser.value = ""; });
  const path = make("input", { type: "text", class: "pk-input", spellcheck: "false", autocomplete: "off", "data-key": item.key, placeholder: "or type its path" });
  typed(path, () => bench.ask({ do: "choose", text: path.value.trim() }));
  const message = messageUnder(path);
  const face = make("label", { class: "pk-choose" }, chooser, make("span", {}, "Choose a file …"));
  return {
    node: make("div", { class: "pk-field" }, make("span", { class: "pk-name" }, item.label), make("div", { class: "pk-file-row" }, face, path), message.node),
    update(now) { fill(path, now.value); path.dataset.last = now.value; path.title = now.value; path.setAttribute("aria-label", `${now.label}: path`); message.update(now.error); },
  };
};

fieldMakers.table = (bench, item) => {
  const body = make("tbody"), notes = make("ul", { class: "pk-notes" }), summary = make("summary", {});
  const head = make("thead", {}, make("tr", {}, ...item.head.map((text) => make("th", { scope: "col" }, text))));
  let shown = "";
  return {
    node: make("div", { class: "pk-field" }, make("table", { class: "pk-table", "aria-label": item.label }, head, body), make("details", { class: "pk-more" }, summary, notes)),
    update(now) {
      const text = JSON.stringify([now.rows, now.notes]);
      if (text === shown) return;
      shown = text;
      body.replaceChildren(...now.rows.map((row) => make("tr", {}, ...row.map((cell) => make("td", {}, cell)))));
      say(summary, now.notes.length === 1 ? "1 remark on reading" : `${now.notes.length} remarks on reading`);
      summary.parentNode.hidden = !now.notes.length;
      notes.replaceChildren(...now.notes.map((note) => make("li", {}, note)));
    },
  };
};

fieldMakers.cycles = (bench, item) => {
  const list = make("div", { class: "pk-cycles", role: "group", "aria-label": item.label });
  const message = messageUnder(list);
  let count = -1, boxes = [];
  return {
    node: make("div", { class: "pk-field" }, make("span", { class: "pk-name" }, item.label), list, message.node),
    update(now) {
      if (now.rows.length !== count) {
        boxes = now.rows.map((row) => {
          const box = make("input", { type: "checkbox", "data-key": `cycle ${row.number}`, onchange: () => bench.ask({ do: "leave_out", number: row.number }) });
          const why = make("small", {}), span = make("span", { class: "pk-span-text" });
          return { box, why, span, node: make("label", {}, box, make("b", {}, String(row.number)), span, why) };
        });
        list.replaceChildren(...boxes.map((entry) => entry.node));
        count = now.rows.length;
      }
      now.rows.forEach((row, place) => {
        const entry = boxes[place];
        entry.box.checked = row.used;
        say(entry.span, row.span);
        say(entry.why, row.why);
        entry.node.classList.toggle("out", !row.used);
      });
      message.update(now.error);
    },
  };
};

fieldMakers.buttons = (bench, item) => {
  const row = make("div", { class: "pk-buttons", role: "group", "aria-label": item.label });
  let shown = "";
  return {
    node: make("div", { class: "pk-field" }, row),
    update(now) {
      const text = JSON.stringify(now.buttons);
      if (text === shown) return;
      shown = text;
      row.replaceChildren(...now.buttons.map((button) => make("button", {
        type: "button", class: "pk-small", disabled: Boolean(button.disabled), title: button.help || "", "aria-label": button.name || button.label, onclick: () => bench.ask(button.asks),
      }, button.label)));
    },
  };
};
