// The answer on the right: overall line, findings that unfold into their shares, checks, remarks, cautions.
class AnswerPane {
  constructor(bench) {
    this.bench = bench;
    this.overall = make("p", { class: "pk-overall", "aria-live": "polite" });
    this.reference = make("p", { class: "pk-reference" });
    this.head = make("p", { class: "pk-interval-head" });
    this.findings = make("div", { class: "pk-findings", role: "list", "aria-label": "Findings" });
    this.checks = make("div", { class: "pk-checks", role: "list", "aria-label": "Checks" });
    this.improve = make("p", { class: "pk-improve" });
    this.notes = make("ul", { class: "pk-notes" });
    this.remarks = make("ul", { class: "pk-notes" });
    this.remarksTitle = make("summary", {});
    this.extra = make("div", {});
    this.saves = make("div", { class: "pk-buttons", role: "group", "aria-label": "Save" });
    this.saved = make("div", { class: "pk-saved", "aria-live": "polite" });
    this.pin = make("button", { type: "button", class: "pk-small", title: "Keep this case as the one to compare with", onclick: () => bench.ask({ do: bench.status.pinned ? "unpin" : "pin" }) }, "Pin");
    this.saves.append(make("span", { class: "pk-name" }, "Save"));
    for (const what of bench.desk.saves) {
      this.saves.append(make("button", { type: "button", class: "pk-small", "aria-label": `Save ${what}`, "data-save": what, onclick: () => bench.ask({ do: "save", what }) }, what));
    }
    this.body = make("div", { class: "pk-answer-body" }, this.reference, this.head, this.findings, this.improve, this.notes, make("h4", {}, "Checks"), this.checks,
      this.extra, make("details", { class: "pk-more" }, this.remarksTitle, this.remarks));
    this.root = make("section", { class: "pk-answer", "aria-label": "Answer" }, this.overall,
      make("div", { class: "pk-actions" }, this.pin, this.saves), this.saved, this.body);
    this.rows = new Map();
    this.checkRows = new Map();
  }

  show(answer) {
    this.root.classList.toggle("pending", !answer.full);
    this.body.hidden = Boolean(answer.empty);
    if (answer.empty) {
      say(this.overall, "No answer yet: choose a recording, then fill in the fields on the left that carry a message.");
      return;
    }
    say(this.overall, answer.overall);
    say(this.reference, answer.reference ? `Changes are against the pinned case: ${answer.reference}` : "");
    this.reference.hidden = !answer.reference;
    say(this.head, answer.interval_head);
    this.list(this.findings, this.rows, answer.findings, (row) => this.finding(row), answer.full);
    this.list(this.checks, this.checkRows, answer.checks, (row) => this.check(row));
    say(this.improve, answer.improve);
    this.words(this.notes, answer.notes);
    this.words(this.remarks, answer.remarks);
    say(this.remarksTitle, `${answer.remarks.length} remarks: what was guessed, repaired, assumed`);
  }

  words(list, texts) {
    const joined = texts.join("\n");
    if (list.dataset.text === joined) return;
    list.dataset.text = joined;
    list.replaceChildren(...texts.map((text) => make("li", {}, text)));
    list.hidden = !texts.length;
  }

  // Rows keep their nodes (and whether they are unfolded) as long as their name is there.
  list(parent, kept, rows, maker, full = true) {
    const order = rows.map((row) => row.name).join();
    for (const row of rows) {
      if (!kept.has(row.name)) kept.set(row.name, maker(row));
      kept.get(row.name).update(row, full);
    }
    if (parent.dataset.order !== order) parent.replaceChildren(...rows.map((row) => kept.get(row.name).node));
    parent.dataset.order = order;
  }

  finding() {
    const part = (name) => make("span", { class: name });
    const label = part("pk-f-label"), value = part("pk-f-value"), unit = part("pk-f-unit"), interval = part("pk-f-interval"), share = part("pk-f-share");
    const reliance = part("pk-f-reliance"), change = part("pk-f-change"), because = make("p", { class: "pk-f-because" }), shares = make("table", { class: "pk-shares" });
    const node = make("details", { class: "pk-finding", role: "listitem" },
      make("summary", {}, label, value, unit, change, interval, reliance, share), because, shares);
    let shown = "";
    return {
      node,
      update(row, full) {
        node.dataset.name = row.name;
        node.classList.toggle("lead", row.lead);
        say(label, row.label); say(value, row.value); say(unit, row.unit); say(change, row.change);
        say(share, full ? row.share : row.lead ? "…" : "");
        say(interval, !full ? "…" : row.interval !== "–" ? row.interval : "");
        say(reliance, `${{ usable: "●", indicative: "◐", "not usable": "▲" }[row.reliance]} ${row.reliance}`);
        reliance.className = `pk-f-reliance ${row.reliance.replace(" ", "-")}`;
        say(because, row.because); because.hidden = !row.because;
        const text = JSON.stringify(row.shares);
        if (text === shown) return;
        shown = text;
        shares.replaceChildren(...row.shares.map(([name, words]) => make("tr", {}, make("td", {}, name), make("td", { class: "pk-number" }, words))));
        if (!row.shares.length) shares.replaceChildren(make("tr", {}, make("td", {}, "No shares: no interval, or no uncertain input.")));
      },
    };
  }

  check() {
    const shape = make("span", { class: "pk-c-shape", "aria-hidden": "true" }), label = make("span", { class: "pk-c-label" }), verdict = make("span", { class: "pk-c-verdict" });
    const because = make("p", {}), source = make("p", { class: "pk-source" });
    const node = make("details", { class: "pk-check", role: "listitem" }, make("summary", {}, shape, label, verdict), because, source);
    return {
      node,
      update(row) {
        node.className = `pk-check ${row.verdict}`;
        node.dataset.name = row.name;
        say(shape, row.shape); say(label, row.label); say(verdict, row.verdict); say(because, row.because); say(source, row.source ? `Limit: ${row.source}` : "");
      },
    };
  }

  status(status) {
    say(this.pin, status.pinned ? "Unpin" : "Pin");
    for (const button of [this.pin, ...this.saves.querySelectorAll("button")]) button.disabled = !status.has_answer;
  }

  // A file that was saved: its place, and the file itself to open from here.
  tellSaved(saved, content) {
    const address = URL.createObjectURL(new Blob([content], { type: `${saved.mime};charset=utf-8` }));
    const link = saved.mime === "text/html" || saved.mime === "text/plain"
      ? make("a", { href: address, target: "_blank", rel: "noopener" }, "open") : make("a", { href: address, download: saved.name }, "download");
    this.saved.replaceChildren(make("span", {}, saved.sentence, " "), link, " ", make("a", { href: address, download: saved.name }, "keep a copy"));
  }
}
