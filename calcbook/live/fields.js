// The fields of a page of calculation, and small helpers.
//
// First part of the sheet's module: `sheet.py` joins fields.js, rows.js and sheet.js in this order,
// as anywidget takes one module and nothing is built.

// --- small helpers -------------------------------------------------------------------------

let made = 0;
const freshId = () => `cb-${Math.random().toString(36).slice(2)}-${++made}`;

function make(tag, classes = "", attributes = {}) {
  const node = document.createElement(tag);
  if (classes) node.className = classes;
  for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, value);
  return node;
}

const html = new WeakMap(); // what an element was last filled with

function fill(node, text) {
  if (html.get(node) === text) return;
  html.set(node, text);
  node.innerHTML = text;
  node.hidden = text === "";
}

function flag(node, name, on) {
  if (on) node.setAttribute(name, "true");
  else node.removeAttribute(name);
}

// Put children in order without touching those that stand right already.
function arrange(parent, children) {
  const focused = parent.contains(document.activeElement) ? document.activeElement : null;
  const wanted = new Set(children);
  for (const child of [...parent.children]) if (!wanted.has(child)) child.remove();
  let at = parent.firstChild;
  for (const child of children) {
    if (child === at) at = at.nextSibling;
    else parent.insertBefore(child, at);
  }
  if (focused && focused.isConnected && document.activeElement !== focused) focused.focus();
}

// Return "undo" or "redo" where a key asks for it, else undefined.
function undoKey({ key, altKey, ctrlKey, metaKey, shiftKey }) {
  if (altKey || !(ctrlKey || metaKey)) return undefined;
  return { z: shiftKey ? "redo" : "undo", y: "redo" }[key.toLowerCase()];
}

// Return a typed text with its last digit's place stepped, or null where that is not clear: two
// numbers, as in feet and inches, or none. Whole numbers are used, so that 0.1 stays exact.
export function stepped(text, by) {
  const found = /^(\s*)([-+\u2212]?)(\d+)(?:\.(\d+))?(.*)$/s.exec(text);
  if (!found || /(^|[\s'"])-?\d/.test(found[5])) return null;
  const [, lead, sign, whole, fraction = "", rest] = found;
  const minus = sign === "-" || sign === "\u2212";
  const value = BigInt(whole + fraction) * (minus ? -1n : 1n) + BigInt(by);
  let digits = (value < 0n ? -value : value).toString().padStart(fraction.length + 1, "0");
  if (fraction) digits = `${digits.slice(0, -fraction.length)}.${digits.slice(-fraction.length)}`;
  return `${lead}${value < 0n ? "-" : ""}${digits}${rest}`;
}

// Return a block copied from a spreadsheet as rows of texts, or null for a single cell.
export function blockOf(text) {
  const lines = text.replace(/\r\n?/g, "\n").replace(/\n$/, "").split("\n");
  if (lines.length === 1 && !text.includes("\t")) return null;
  return lines.map((line) => line.split("\t").map((cell) => cell.trim()));
}

// --- a field -------------------------------------------------------------------------------

// A text field or drop-down. `post` sends what was typed; `spec` says what is in force. A text
// being typed is never overwritten, and a refused one stays until it is put right or let go.
class Field {
  constructor(spec, link, { post, step, drop, label, title, grid = false }) {
    Object.assign(this, { link, post, step, drop, grid });
    this.choice = spec.type === "choice";
    this.node = make(this.choice ? "select" : "input", "", { title, "aria-label": label });
    if (this.choice) this.fillOptions(spec.options);
    else Object.assign(this.node, {
      type: "text", spellcheck: false, autocomplete: "off", placeholder: " ",
    });
    this.known = ""; // what Python has of this field: shown by it, or sent to it
    this.force = "";
    this.sent = 0;
    this.node.addEventListener("keydown", (event) => this.pressed(event));
    this.node.addEventListener("blur", () => this.commit());
    if (this.choice) this.node.addEventListener("change", () => this.commit());
    else this.node.addEventListener("input", () => {
      this.retyped = true;
      this.fit();
    });
  }

  fillOptions(options) {
    const former = this.node.value;
    this.options = JSON.stringify(options);
    this.node.replaceChildren(...options.map(([value, words]) => {
      const option = make("option", "", { value });
      option.textContent = words;
      return option;
    }));
    this.node.value = former;
  }

  get dirty() {
    return this.node.value !== this.known;
  }

  show(spec, wrong) {
    if (this.choice && JSON.stringify(spec.options) !== this.options) this.fillOptions(spec.options);
    this.spec = spec;
    this.wrong = wrong;
    this.force = spec.force;
    this.node.classList.toggle("cb-wrong", wrong);
    flag(this.node, "aria-invalid", wrong);
    this.settle();
  }

  // Take over the text of Python, unless something newer stands in the field.
  settle() {
    if (this.link.acknowledged < this.sent) return;
    const typing = this.dirty && document.activeElement === this.node && !this.choice;
    if (typing) return;
    this.known = this.spec.text;
    if (this.node.value !== this.known) this.node.value = this.known;
    if (this.choice && this.node.value !== this.known) this.node.selectedIndex = -1;
    this.known = this.node.value;
    this.fit();
  }

  fit() {
    if (this.choice) {
      const words = this.node.selectedOptions[0]?.textContent ?? "";
      this.node.style.setProperty("--cb-chars", Math.min(words.length + 2, 24));
      return;
    }
    const [least, most] = this.grid ? [3, 30] : this.spec?.long ? [12, 60] : [5, 30];
    const width = Math.min(Math.max(this.node.value.length + 1, least), most);
    if (this.width === width) return;
    this.node.style.setProperty("--cb-chars", (this.width = width));
    if (this.grid) this.node.size = width; // or the browser would give every column twenty
  }

  commit({ always = false } = {}) {
    if (!(this.dirty || always) || (this.choice && this.node.selectedIndex < 0)) return;
    this.known = this.node.value;
    this.unsigned = this.retyped = false;
    this.waiting = null;
    this.fit();
    this.sent = this.post(this.node.value);
  }

  pressed(event) {
    const { key, altKey: alt } = event;
    const wish = this.dirty ? null : undoKey(event);
    if (key === "Enter" && !alt) {
      event.preventDefault();
      this.commit({ always: this.unsigned || this.retyped }); // a stepped value, or one typed
      // again as it was, is confirmed by Enter
    } else if (key === "Escape") {
      event.preventDefault();
      this.letGo();
    } else if ((key === "ArrowUp" || key === "ArrowDown") && this.spec.step && alt === this.grid) {
      event.preventDefault();
      this.stepBy((key === "ArrowUp" ? 1 : -1) * (event.shiftKey ? 10 : 1));
    } else if (wish) {
      event.preventDefault();
      this.link.post({ do: wish });
    }
  }

  letGo() {
    this.node.value = this.known = this.force;
    this.fit();
    if (this.wrong) this.sent = this.drop();
  }

  // Steps are shown at once; while one is on its way only the last of the next ones is kept.
  stepBy(by) {
    const text = stepped(this.node.value, by);
    if (text === null) return;
    this.node.value = this.known = text;
    this.unsigned = true;
    this.fit();
    if (this.link.acknowledged < this.sent) this.waiting = text;
    else this.sent = this.step(text);
  }

  acknowledged() {
    if (this.link.acknowledged < this.sent) return;
    if (this.waiting) {
      this.sent = this.step(this.waiting);
      this.waiting = null;
    } else if (this.spec) this.settle();
  }
}

// --- a confirm mark, a source, buttons ------------------------------------------------------

class Mark {
  constructor(post, bare = false) {
    this.bare = bare;
    this.node = make("label", "cb-confirm");
    this.box = make("input", "", { type: "checkbox" });
    this.words = make("span");
    this.node.append(this.box, this.words);
    this.box.addEventListener("change", () => post(this.box.checked));
    this.box.addEventListener("keydown", (event) => {
      if (event.key !== "Enter") return;
      event.preventDefault();
      this.box.click();
    });
  }

  show(spec) {
    this.spec = spec;
    this.node.hidden = !spec;
    if (!spec) return;
    this.box.checked = spec.on;
    this.box.setAttribute("aria-label", spec.label);
    this.node.title = this.bare ? spec.text : spec.label;
    this.node.classList.toggle("cb-waiting", !spec.on);
    if (!this.bare) this.words.textContent = spec.text;
  }

  acknowledged() {
    if (this.spec) this.box.checked = this.spec.on;
  }
}

// A source reads as a note; a click or Enter turns it into a field.
class Source {
  constructor(post) {
    this.post = post;
    this.node = make("span", "cb-source-place");
    this.button = make("button", "cb-source", { type: "button" });
    this.button.addEventListener("click", () => this.open());
    this.node.append(this.button);
  }

  show(spec) {
    this.spec = spec;
    this.node.hidden = !spec;
    if (!spec) return;
    this.button.textContent = spec.shown;
    this.button.title = `${spec.shown} (change)`;
    this.button.setAttribute("aria-label", `${spec.label}: ${spec.shown}`);
    this.button.classList.toggle("cb-none", !spec.text);
  }

  open() {
    const field = make("input", "cb-source-field", { type: "text", "aria-label": this.spec.label });
    field.value = this.spec.text;
    let open = true;
    const close = (take) => {
      if (!open) return;
      open = false;
      const focused = document.activeElement === field;
      field.replaceWith(this.button);
      if (focused) this.button.focus();
      if (take && field.value.trim() !== this.spec.text) this.post(field.value.trim());
    };
    field.addEventListener("keydown", (event) => {
      if (event.key !== "Enter" && event.key !== "Escape") return;
      event.preventDefault();
      close(event.key === "Enter");
    });
    field.addEventListener("blur", () => close(true));
    this.button.replaceWith(field);
    field.focus();
    field.select();
  }
}

function smallButton(text, label, act) {
  const button = make("button", "cb-small", { type: "button", title: label, "aria-label": label });
  button.textContent = text;
  button.addEventListener("click", act);
  return button;
}

class Buttons {
  constructor(link) {
    this.link = link;
    this.node = make("span", "cb-buttons");
  }

  show(buttons = []) {
    const state = JSON.stringify(buttons);
    if (this.state === state) return;
    this.state = state;
    this.node.hidden = !buttons.length;
    this.node.replaceChildren(
      ...buttons.map((b) => smallButton(b.text, b.label, () => this.link.post(b.do))),
    );
  }
}
