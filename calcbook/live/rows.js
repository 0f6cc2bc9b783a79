// The rows of a page of calculation: text, figures, entries, schedules (second part, see fields.js).

// --- rows ----------------------------------------------------------------------------------

// A row of text: number, words, body, margin. Other rows put their controls into its body.
class Row {
  constructor(row, link) {
    this.link = link;
    this.kind = row.kind;
    this.wide = row.cls.includes("cb-wide");
    this.node = make("div");
    this.no = make("div", "cb-no");
    this.words = make("div", "cb-words");
    this.body = make("div", "cb-body");
    this.margin = make("div", "cb-margin");
    this.notes = make("div");
    this.margin.append(this.notes);
    this.text = make("div");
    this.body.append(this.text);
    this.node.append(this.no, this.words, this.body, this.margin);
    if (this.wide) {
      this.said = make("div");
      const whole = make("div", "cb-whole-width");
      whole.append(this.said, this.body);
      this.words.append(whole);
    }
    this.buttons = new Buttons(link);
    this.body.append(this.buttons.node);
    this.controls = [];
  }

  static fits(old, row) {
    return old.kind === row.kind && old.wide === row.cls.includes("cb-wide");
  }

  show(id, row) {
    if (this.row === row) return;
    this.row = row;
    if (this.node.dataset.id !== id) this.node.dataset.id = id;
    if (this.node.className !== row.cls) this.node.className = row.cls;
    fill(this.no, row.no);
    this.no.hidden = false; // the column stays
    fill(this.said ?? this.words, row.words);
    this.words.hidden = false;
    fill(this.notes, row.margin);
    this.buttons.show(row.buttons);
    this.draw(row);
  }

  draw(row) {
    fill(this.text, row.body);
  }

  acknowledged() {
    for (const control of this.controls) control.acknowledged();
  }
}

// A figure: the picture is changed in place, so that the page does not jump.
class FigureRow extends Row {
  draw(row) {
    const now = this.text.querySelector("img");
    const next = make("template");
    next.innerHTML = row.body;
    const image = next.content.querySelector("img");
    if (!now || !image) return fill(this.text, row.body);
    html.set(this.text, row.body);
    if (now.src !== image.src) now.src = image.src;
    if (now.alt !== image.alt) now.alt = image.alt;
  }
}

class EntryRow extends Row {
  constructor(row, link) {
    super(row, link);
    const { name } = row;
    this.line = make("div", "cb-field");
    this.before = make("span", "cb-before");
    this.beside = make("span", "cb-beside");
    this.told = make("div", "", { id: freshId() });
    this.under = make("div", "cb-under");
    this.field = new Field(row.field, link, {
      post: (text) => link.post({ do: "enter", name, text }),
      step: (text) => link.post({ do: "step", name, text }),
      drop: () => link.post({ do: "drop", name }),
      label: row.field.label,
      title: row.field.label,
    });
    this.mark = new Mark((yes) => link.post({ do: "confirm", name, yes }));
    this.source = new Source((text) => link.post({ do: "source", name, text }));
    this.line.append(this.before, this.field.node, this.beside, this.buttons.node);
    this.body.replaceChildren(this.line, this.told, this.under);
    this.margin.append(this.source.node, this.mark.node);
    this.controls = [this.field, this.mark];
  }

  draw({ field, under, confirm, source }) {
    this.line.classList.toggle("cb-long", field.long);
    fill(this.before, field.before);
    fill(this.beside, field.beside);
    fill(this.told, field.refused);
    fill(this.under, under);
    this.field.show(field, field.refused !== "");
    if (field.refused) this.field.node.setAttribute("aria-describedby", this.told.id);
    else this.field.node.removeAttribute("aria-describedby");
    this.mark.show(confirm);
    this.source.show(source);
  }
}

// --- schedules -----------------------------------------------------------------------------

// A table whose entered columns are fields. Keys: Enter and Shift+Enter go down and up, the
// arrows too; Tab goes across; Alt with an arrow steps a number; a block pasted into a cell goes
// into the rows from there on.
class GridRow extends Row {
  constructor(row, link) {
    super(row, link);
    this.name = row.name;
    this.lines = new Map();
    this.place = make("div", "cb-scroll");
    this.table = make("table", "cb-grid cb-typed-grid");
    this.head = make("tr");
    this.rows = make("tbody");
    this.totals = make("tr");
    const [head, foot] = [make("thead"), make("tfoot")];
    head.append(this.head);
    foot.append(this.totals);
    this.table.append(head, this.rows, foot);
    this.place.append(this.table);
    this.first = smallButton("add a row on top", "add a row on top", () =>
      link.post({ do: "add_row", schedule: this.name, below: null }));
    this.first.classList.add("cb-first");
    this.message = make("div", "", { id: freshId() });
    this.below = make("div");
    this.body.replaceChildren(this.place, this.first, this.message, this.below, this.buttons.node);
  }

  draw(row) {
    const layout = JSON.stringify([row.columns, row.confirming, row.fixed]);
    this.first.hidden = row.fixed;
    if (layout !== this.layout) this.lines.clear(); // other columns: the rows are made anew
    this.layout = layout;
    this.drawFrame(row);
    const byPlace = [...this.lines.values()];
    const lines = new Map();
    row.keys.forEach((key, place) => {
      let line = this.lines.get(key);
      const former = byPlace[place];
      if (!line && former && !row.keys.includes(former.key)) line = former; // it was renamed
      line ??= new GridLine(this, row);
      line.show(key, row.cells[key]);
      lines.set(key, line);
    });
    this.lines = lines;
    const held = document.activeElement?.closest("tr");
    const at = held ? [...this.rows.children].indexOf(held) : -1;
    arrange(this.rows, [...lines.values()].map((line) => line.node));
    if (at >= 0 && !held.isConnected) this.focusAt(Math.min(at, row.keys.length - 1));
    this.controls = [...lines.values()].flatMap((line) => line.controls);
  }

  drawFrame(row) {
    const words = make("div");
    words.innerHTML = row.words;
    this.table.setAttribute("aria-label", words.textContent);
    const confirmed = { html: row.confirming ? "confirmed" : "" };
    this.drawCells(this.head, "th", [...row.heads, { html: "source" }, { html: "" }, confirmed]);
    this.head.lastChild.className = "cb-row-mark";
    const totals = row.totals.map((text, place) => ({ html: text, num: row.heads[place].num }));
    this.drawCells(this.totals, "td", totals);
    this.totals.hidden = !totals.length;
    fill(this.message, row.message);
    fill(this.below, row.below);
  }

  drawCells(line, tag, cells) {
    while (line.children.length > cells.length) line.lastChild.remove();
    while (line.children.length < cells.length) {
      line.append(make(tag, "", tag === "th" ? { scope: "col" } : {}));
    }
    cells.forEach((cell, place) => {
      const node = line.children[place];
      fill(node, cell.html);
      node.hidden = false;
      node.classList.toggle("cb-number", !!cell.num);
    });
  }

  focusAt(place) {
    const line = [...this.lines.values()][place];
    (line ? line.fields.values().next().value.node : this.first).focus();
  }

  // Go to the same column some rows away; at the ends the focus stays.
  go(key, column, by) {
    const keys = [...this.lines.keys()];
    const line = this.lines.get(keys[keys.indexOf(key) + by]);
    const field = line?.fields.get(column);
    if (!field) return;
    field.node.focus();
    if (!field.choice) field.node.select();
  }
}

class GridLine {
  constructor(grid, row) {
    Object.assign(this, { grid, link: grid.link, cells: {}, nodes: new Map(), fields: new Map() });
    this.node = make("tr");
    for (const column of row.columns) {
      const cell = make("td", column.num ? "cb-number" : "");
      this.nodes.set(column.name, cell);
      if (column.type !== "shown") this.addField(column, cell);
      this.node.append(cell);
    }
    this.source = new Source((text) => this.send({ do: "row_source", text }));
    this.mark = new Mark((yes) => this.send({ do: "confirm_row", yes }), true);
    const [source, tools, mark] = ["cb-row-source", "cb-tools", "cb-row-mark"].map((name) =>
      make("td", name));
    source.append(this.source.node);
    const offered = row.fixed ? [] : ["move up", "move down", "add a row below", "remove"];
    this.tools = offered.map((what) => this.tool(what));
    tools.append(...this.tools);
    mark.append(this.mark.node);
    this.node.append(source, tools, mark);
    this.controls = [...this.fields.values(), this.mark];
  }

  send(message) {
    return this.link.post({ schedule: this.grid.name, key: this.key, ...message });
  }

  tool(what) {
    const words = { "move up": "\u2191", "move down": "\u2193", "add a row below": "+", remove: "\u00d7" };
    const acts = {
      "move up": () => this.send({ do: "move_row", by: -1 }),
      "move down": () => this.send({ do: "move_row", by: 1 }),
      "add a row below": () =>
        this.link.post({ do: "add_row", schedule: this.grid.name, below: this.key }),
      remove: () => this.send({ do: "remove_row" }),
    };
    const button = smallButton(words[what], what, acts[what]);
    button.dataset.what = what;
    return button;
  }

  addField(column, cell) {
    const { name } = column;
    const field = new Field(column, this.link, {
      post: (text) => this.send({ do: "cell", column: name, text }),
      step: (text) => this.send({ do: "step_cell", column: name, text }),
      drop: () => this.send({ do: "drop", column: name }),
      label: column.label,
      title: column.label,
      grid: true,
    });
    field.node.dataset.column = name;
    field.node.addEventListener("keydown", (event) => this.pressed(event, field, name));
    field.node.addEventListener("paste", (event) => {
      const block = blockOf(event.clipboardData?.getData("text/plain") ?? "");
      if (!block) return;
      event.preventDefault();
      this.send({ do: "paste", column: name, block });
    });
    field.column = column;
    field.beside = make("span", "cb-beside");
    cell.append(field.node, field.beside);
    this.fields.set(name, field);
  }

  pressed(event, field, column) {
    if (event.altKey || event.ctrlKey || event.metaKey) return;
    const arrows = field.choice ? {} : { ArrowUp: -1, ArrowDown: 1 };
    const by = { Enter: event.shiftKey ? -1 : 1, ...arrows }[event.key];
    if (by === undefined) return;
    event.preventDefault();
    this.grid.go(this.key, column, by);
  }

  show(key, cells) {
    if (this.key !== key) this.rename(key);
    for (const [column, cell] of Object.entries(cells)) {
      if (this.cells[column] === cell) continue;
      if (column === "*") this.showStanding(cell);
      else if (this.fields.has(column)) this.showField(this.fields.get(column), cell);
      else if (this.nodes.has(column)) fill(this.nodes.get(column), cell.html);
    }
    for (const node of this.nodes.values()) node.hidden = false;
    this.cells = cells;
  }

  rename(key) {
    this.key = key;
    for (const field of this.fields.values()) {
      field.node.dataset.key = key;
      field.node.setAttribute("aria-label", `${key}, ${field.column.label}`);
    }
    for (const button of this.tools) {
      const { what } = button.dataset;
      const [verb, ...rest] = what.split(" ");
      const label = verb === "add" ? `${what} ${key}` : [verb, "row", key, ...rest].join(" ");
      button.title = label;
      button.setAttribute("aria-label", label);
    }
  }

  showField(field, cell) {
    field.show({ ...field.column, ...cell }, cell.wrong);
    fill(field.beside, cell.beside);
    if (cell.wrong) field.node.setAttribute("aria-describedby", this.grid.message.id);
    else field.node.removeAttribute("aria-describedby");
  }

  showStanding({ governs, confirm, source }) {
    this.node.classList.toggle("cb-governs", governs);
    this.mark.show(confirm);
    this.source.show(source);
  }
}
