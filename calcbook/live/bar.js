// The bar of a workbook. It draws `state` (calcbook/live/bar.py) and sends what is asked for.

const make = (tag, attributes = {}, children = []) => {
  const node = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) {
    if (name === "text") node.textContent = value;
    else if (name.startsWith("on")) node.addEventListener(name.slice(2), value);
    else if (value === true) node.setAttribute(name, "");
    else if (value !== false && value !== null) node.setAttribute(name, value);
  }
  node.append(...children);
  return node;
};

const button = (text, press, more = {}) =>
  make("button", { type: "button", class: "cb-act", text, onclick: press, ...more });

const root = (element) => element.closest(".jp-Notebook") ?? document;

// Go to a row of a section, and into its field if it has one.
const jump = (element, place) => {
  const sections = [...root(element).querySelectorAll(".cb-view")];
  const view = sections.find((one) => one.dataset.section === place.section);
  const rows = view ? [...view.querySelectorAll("[data-id]")] : [];
  const row = rows.find((one) => one.dataset.id === place.row) ?? view;
  for (const list of element.querySelectorAll("details[open]")) list.open = false;
  if (!row) return;
  row.scrollIntoView({ block: "center" });
  const field = row.querySelector("input:not([type=checkbox]), select");
  if (field) field.focus({ preventScroll: true });
  row.classList.add("cb-here");
  setTimeout(() => row.classList.remove("cb-here"), 1600);
};

const countNode = (element, count) => {
  if (!count.text) return [];
  if (!count.open) return [make("span", { class: "cb-count", text: `✓ ${count.text}` })];
  const places = count.places.map((place) =>
    make("li", {}, [button(place.text, () => jump(element, place), { class: "cb-place" })]));
  const details = make("details", { class: `cb-count cb-count-${count.id}`, name: "cb-counts" }, [
    make("summary", { text: `! ${count.text}` }),
    make("ul", {}, places),
  ]);
  return [details];
};

const marksNode = (send, mark) => {
  if (!mark) return [];
  const name = make("input", { type: "text", class: "cb-mark-name", size: 6,
    "aria-label": "name of the new mark", placeholder: "new mark" });
  const select = make("select", { "aria-label": "mark", class: "cb-mark",
    onchange: (event) => send({ do: "open_mark", mark: event.target.value }) },
    mark.all.map((one) => make("option", { value: one, text: one, selected: one === mark.current })));
  const add = (like) => {
    if (name.value.trim()) send({ do: "add_mark", mark: name.value, like });
    else name.focus();
  };
  name.addEventListener("keydown", (event) => event.key === "Enter" && add(""));
  const pieces = [];
  if (mark.all.length) pieces.push(make("label", { class: "cb-mark-label", text: "Mark " }, [select]));
  pieces.push(name, button("add", () => add(""), { title: "add a mark with the template's values" }));
  if (mark.current) {
    pieces.push(
      button("copy", () => add(mark.current), { title: `add a mark like ${mark.current}, to be confirmed` }),
      button("remove", () => send({ do: "remove_mark", mark: mark.current }),
        { title: `remove the mark ${mark.current}; undo brings it back` }));
  }
  return [make("span", { class: "cb-marks" }, pieces)];
};

const askNode = (send, ask) =>
  make("div", { class: "cb-ask", role: "alertdialog", "aria-label": "a question" }, [
    make("strong", { text: "? " }), make("span", { text: ask.text }),
    ...ask.options.map(([option, words]) =>
      button(words, () => send({ do: "answer", ask: ask.id, option }))),
  ]);

const printNode = (send, printing) => {
  const idle = !printing.doing;
  const off = { disabled: !idle || Boolean(printing.why_not), title: printing.why_not || null };
  const pieces = [
    button("PDF of this workbook", () => send({ do: "print", whole: false }), off),
    button("Pack of the job", () => send({ do: "print", whole: true }), off),
  ];
  if (printing.doing) pieces.push(make("progress", { "aria-label": "making the PDF" }));
  const told = printing.doing || printing.told;
  if (told) {
    pieces.push(make("span", { role: "status", class: printing.failed ? "cb-bad" : "",
      text: printing.failed ? `Not made: ${told}` : told }));
  }
  return [make("span", { class: "cb-print" }, [...pieces, make("span", { class: "cb-file" })])];
};

const PARTS = {
  marks: (element, send, s) => [make("span", { class: "cb-bar-title", text: s.title }), ...marksNode(send, s.mark)],
  counts: (element, send, s) => s.counts.flatMap((count) => countNode(element, count)),
  steps: (element, send, s) => [
    button("Undo", () => send({ do: "undo" }), { disabled: !s.undo, title: s.undo ? `undo: ${s.undo}` : "nothing to undo" }),
    button("Redo", () => send({ do: "redo" }), { disabled: !s.redo, title: s.redo ? `redo: ${s.redo}` : "nothing to do again" }),
    ...(s.counts.some((c) => c.id === "stale" && c.open)
      ? [button("Take all that moved", () => send({ do: "take_all" }))] : []),
  ],
  print: (element, send, s) => printNode(send, s.printing),
  said: (element, send, s) => [
    ...s.asks.map((ask) => askNode(send, ask)),
    ...(s.unwritten ? [make("div", { class: "cb-bad", role: "alert" }, [
      make("span", { text: `${s.unwritten} ` }),
      button("write again", () => send({ do: "write_again" }))])] : []),
    ...(s.told ? [make("div", { class: "cb-bad", role: "alert", text: s.told })] : []),
    ...s.notices.map((text) => make("div", { class: "cb-quiet", role: "status", text })),
  ],
};

// Sensitivity and value needed: what is chosen stays in the fields, what was found is drawn below.
PARTS.study = (element, send, s) => {
  const { study } = s;
  const toggle = button("Sensitivity, value needed", () => send({ do: "study", open: !study.open }),
    { "aria-expanded": String(study.open) });
  if (!study.open) return [toggle];
  const pick = (label, options, chosen, change) =>
    make("label", {}, [`${label} `, make("select", { "aria-label": label, onchange: change },
      options.map(([value, text]) => make("option", { value, text, selected: value === chosen })))]);
  const results = pick("result", study.results, study.result,
    (event) => send({ do: "choose", result: event.target.value }));
  const entry = pick("entry", study.entries, study.entry, () => {});
  const target = make("input", { type: "text", "aria-label": "target of the result", size: 10,
    placeholder: "target", value: study.target ?? "" });
  const ask = () => send({ do: "needed", result: study.result,
    entry: entry.querySelector("select").value, target: target.value });
  target.addEventListener("keydown", (event) => event.key === "Enter" && ask());
  const pieces = [toggle, make("div", { class: "cb-study-row" }, [results,
    button("sensitivity", () => send({ do: "sensitivity", result: study.result }))]),
    make("div", { class: "cb-study-row" }, [entry, target, button("value needed", ask)])];
  if (study.needed) pieces.push(neededNode(send, study.needed));
  if (study.sensitivity) {
    const found = make("div", { class: "cb-study-found" });
    found.innerHTML = study.sensitivity.html;
    pieces.push(make("strong", { text: study.sensitivity.title }), found);
  }
  return pieces;
};

const neededNode = (send, needed) =>
  make("div", { class: "cb-study-found", role: "status" }, [
    ...needed.answers.map((answer) => make("div", {}, [
      make("div", { text: answer.text }),
      make("div", { class: "cb-quiet", text: answer.way }),
      ...answer.uses.map((text) =>
        button(`use ${text}, to be confirmed`, () => send({ do: "use", entry: needed.entry, text }))),
    ])),
    ...needed.notes.map((text) => make("div", { class: "cb-quiet", text })),
  ]);

// What each part is drawn from: a part is drawn again only when that has changed.
const DRAWN_FROM = {
  marks: (s) => [s.title, s.mark],
  counts: (s) => s.counts,
  steps: (s) => [s.undo, s.redo, s.counts.some((c) => c.id === "stale" && c.open)],
  print: (s) => s.printing,
  study: (s) => s.study,
  said: (s) => [s.asks, s.unwritten, s.told, s.notices],
};

const draw = (element, send, state, drawn) => {
  for (const [part, from] of Object.entries(DRAWN_FROM)) {
    const key = JSON.stringify(from(state));
    if (drawn[part] === key) continue;
    drawn[part] = key;
    const box = element.querySelector(`.cb-bar-${part}`);
    const open = box.querySelector("details[open]")?.className;
    const file = part === "print" ? box.querySelector(".cb-file") : null;
    box.replaceChildren(...PARTS[part](element, send, state));
    if (file) box.querySelector(".cb-file")?.replaceWith(file);
    for (const one of box.querySelectorAll("details")) one.open = one.className === open;
  }
};

// The counts once more, small, in the corner of the notebook while the bar is out of sight.
const corner = (element, model) => {
  const strip = make("button", { type: "button", class: "cb-corner", hidden: true,
    title: "to the bar of this workbook",
    onclick: () => element.scrollIntoView({ block: "start" }) });
  const tell = () => {
    const open = model.get("state").counts.filter((count) => count.open).map((count) => `! ${count.text}`);
    strip.textContent = open.join("  ") || "✓ nothing open";
  };
  const watch = new IntersectionObserver(([entry]) => { strip.hidden = entry.isIntersecting; });
  requestAnimationFrame(() => {
    const panel = element.closest(".jp-NotebookPanel");
    if (!panel) return;
    panel.append(strip);
    watch.observe(element);
  });
  return { tell, end: () => { watch.disconnect(); strip.remove(); } };
};

function render({ model, el }) {
  el.classList.add("cb-bar");
  el.setAttribute("role", "region");
  el.setAttribute("aria-label", "bar of the workbook");
  el.dataset.lmSuppressShortcuts = "true";
  el.append(...Object.keys(DRAWN_FROM).map((part) => make("div", { class: `cb-bar-part cb-bar-${part}` })));
  const send = (message) => model.send(message);
  const drawn = {};
  const strip = corner(el, model);
  const show = () => {
    if (!model.get("state").counts) return; // nothing is declared yet
    draw(el, send, model.get("state"), drawn);
    strip.tell();
  };
  const receive = (message, buffers) => {
    if (message.type !== "file") return;
    const address = URL.createObjectURL(new Blob([buffers[0]], { type: "application/pdf" }));
    const box = el.querySelector(".cb-file");
    box.replaceChildren(
      make("a", { href: address, download: message.name, text: `download ${message.name}` }),
      make("a", { href: address, target: "_blank", text: "open" }));
  };
  el.addEventListener("keydown", (event) => {
    if (event.key === "Escape") for (const one of el.querySelectorAll("details[open]")) one.open = false;
    event.stopPropagation();
  });
  model.on("change:state", show);
  model.on("msg:custom", receive);
  show();
  return () => { strip.end(); model.off("change:state", show); model.off("msg:custom", receive); };
}

export default { render };
