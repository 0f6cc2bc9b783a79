// The page of one section: rows of calculation with the browser's own fields in them.
//
// Python holds the page as plain data (`patches.py`) and sends what changed; this file draws it
// and patches the document in place. An element is touched only if its HTML changed, so focus,
// caret and scroll positions stay. Numbers and words come ready made: nothing is formatted here.
//
// Row kinds are described in `entryrow.py` and `gridrow.py`, messages in `acts.py`. The fields and
// rows come from fields.js and rows.js, which stand before this file in the same module.

const ANSWER_MS = 8000; // after this long without an answer the page says so

// --- the sheet ------------------------------------------------------------------------------

const KINDS = { text: Row, figure: FigureRow, entry: EntryRow, grid: GridRow };

class SheetView {
  constructor(el, page, link) {
    Object.assign(this, { el, page, link, rows: new Map() });
    el.classList.add("cb-view");
    el.setAttribute("role", "group");
    this.title = make("div", "cb-title", { role: "heading", "aria-level": "3" });
    this.number = make("span");
    this.name = make("b");
    this.title.append(this.number, this.name);
    this.notice = make("div", "cb-notice");
    this.trouble = make("div", "cb-trouble-place", { role: "status" });
    this.silent = make("div", "cb-trouble", { role: "status" });
    this.place = make("div", "cb-rows");
    el.append(this.title, this.notice, this.trouble, this.silent, this.place);
    fill(this.silent, "");
    this.draw();
    this.onKey = (event) => this.pressed(event);
    window.addEventListener("keydown", this.onKey, true);
    el.addEventListener("keydown", (event) => this.undoWished(event));
    this.hideStill();
  }

  draw() {
    const { head, order, rows } = this.page;
    this.el.dataset.section = head.title;
    this.el.setAttribute("aria-label", `${head.number} ${head.title}`);
    this.number.textContent = head.number;
    this.name.textContent = head.title;
    fill(this.notice, head.notice);
    fill(this.trouble, head.trouble);
    const shown = new Map();
    for (const id of order) {
      const row = rows[id];
      let view = this.rows.get(id);
      if (!view || !Row.fits(view, row)) view = new KINDS[row.kind](row, this.link);
      view.show(id, row);
      shown.set(id, view);
    }
    this.rows = shown;
    arrange(this.place, [...shown.values()].map((view) => view.node));
  }

  patched({ focus }) {
    this.draw();
    this.showSilence(false);
    for (const view of this.rows.values()) view.acknowledged();
    if (!focus) return;
    const [id, key, column] = focus;
    const field = this.rows.get(id)?.lines?.get(key)?.fields.get(column);
    field?.node.focus();
    field?.node.select?.();
  }

  showSilence(on) {
    fill(this.silent, on ? `<strong>${this.page.head.silent}</strong>` : "");
  }

  // Keys typed in the sheet are not JupyterLab's shortcuts; those with Ctrl (save, palette) stay
  // its own, except undo, redo and the clipboard.
  pressed(event) {
    if (!this.el.contains(event.target)) return;
    const held = event.ctrlKey || event.metaKey;
    const ours = !held || "zyacvx".includes(event.key.toLowerCase());
    if (ours) this.el.setAttribute("data-lm-suppress-shortcuts", "true");
    else this.el.removeAttribute("data-lm-suppress-shortcuts");
  }

  // Undo and redo from a button or a mark; text fields decide for themselves (`Field.pressed`).
  undoWished(event) {
    if (event.defaultPrevented || event.target.matches("input[type=text], select")) return;
    const wish = undoKey(event);
    if (!wish) return;
    event.preventDefault();
    this.link.post({ do: wish });
  }

  // Take the still output before this one out of sight, once this one stands in the page.
  hideStill(wait = 10) {
    if (!this.el.isConnected) {
      this.later = setTimeout(() => this.hideStill(Math.min(2 * wait, 1000)), wait);
      return;
    }
    this.still = this.el.closest(".jp-OutputArea-child")?.previousElementSibling;
    this.still?.classList.add("cb-still");
  }

  dispose() {
    window.removeEventListener("keydown", this.onKey, true);
    clearTimeout(this.later);
    this.still?.classList.remove("cb-still");
  }
}

// --- the model -------------------------------------------------------------------------------

const links = new WeakMap(); // page -> its link: one for a model, whatever its views

// What the views of one model share: the page, the messages on their way, and their answers.
class Link {
  constructor(model, page) {
    Object.assign(this, { model, page, views: new Set() });
    this.acknowledged = this.count = page.ack;
  }

  post(message) {
    const n = ++this.count;
    this.model.send({ ...message, n });
    clearTimeout(this.timer);
    this.timer = setTimeout(() => this.views.forEach((view) => view.showSilence(true)), ANSWER_MS);
    return n;
  }

  received(message) {
    if (message.type === "page") {
      Object.assign(this.page, message.page);
    } else if (message.type === "patch") {
      if (message.base !== this.page.serial) return this.hello();
      this.merge(message);
    } else return;
    this.acknowledged = Math.max(this.acknowledged, this.page.ack);
    if (this.acknowledged >= this.count) clearTimeout(this.timer);
    this.views.forEach((view) => view.patched(message));
  }

  merge({ serial, ack, head = {}, order, rows = {}, cells = {} }) {
    const { page } = this;
    Object.assign(page, { serial, ack });
    Object.assign(page.head, head);
    if (order) page.order = order;
    for (const [id, row] of Object.entries(rows)) {
      const kept = page.rows[id]?.cells;
      page.rows[id] = row.cells || row.kind !== "grid" ? row : { ...row, cells: kept };
    }
    for (const [id, changed] of Object.entries(cells)) {
      const grid = { ...page.rows[id], cells: { ...page.rows[id].cells } };
      for (const [key, line] of Object.entries(changed)) {
        grid.cells[key] = { ...grid.cells[key], ...line };
      }
      page.rows[id] = grid;
    }
  }

  hello() {
    this.model.send({ do: "hello", serial: this.page.serial });
  }
}

function initialize({ model }) {
  const page = model.get("page");
  const link = new Link(model, page);
  links.set(page, link);
  model.on("msg:custom", (message) => link.received(message));
  link.hello();
}

function render({ model, el }) {
  const link = links.get(model.get("page"));
  const view = new SheetView(el, link.page, link);
  link.views.add(view);
  return () => {
    link.views.delete(view);
    view.dispose();
  };
}

export default { initialize, render };
