// Wells as SVG: one glyph per pair. All text goes in as text nodes.

const SVG = "http://www.w3.org/2000/svg";
const WIDE = 26;
const NARROW = 22;
const MANY_COLUMNS = 16;
const LONGEST_NAME = 16;
const LETTER = 7;

function make(tag, attributes = {}, ...children) {
  const node = document.createElementNS(SVG, tag);
  for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, value);
  node.append(...children);
  return node;
}

function shortened(name) {
  return name.length > LONGEST_NAME ? `${name.slice(0, LONGEST_NAME - 1)}…` : name;
}

// Outline of a verdict around (0, 0), and its left half for "park".
const SHAPES = {
  go: ["M-8 0a8 8 0 1 0 16 0a8 8 0 1 0 -16 0z", "M0 -8a8 8 0 0 0 0 16z"],
  watch: ["M0 -9L9 0L0 9L-9 0z", "M0 -9L-9 0L0 9z"],
  stuck: ["M-7 -7H7V7H-7z", "M-7 -7H0V7H-7z"],
  refused: ["M-3.7 -9H3.7L9 -3.7V3.7L3.7 9H-3.7L-9 3.7V-3.7z", ""],
};

function glyph(verdict, choice, decided) {
  const [outline, half] = SHAPES[verdict];
  const group = make("g", { class: `${verdict} ${choice}` });
  group.append(make("path", { d: outline, class: "glyph" }));
  if (choice === "park" && half) group.append(make("path", { d: half, class: "half" }));
  if (decided) group.append(make("circle", { cx: 8.5, cy: -8.5, r: 3, class: "dot" }));
  return group;
}

function render({ model, el }) {
  const root = document.createElement("div");
  root.className = "libtool-grid";
  const frame = document.createElement("div");
  frame.className = "libtool-grid-frame";
  const svg = make("svg", { tabindex: "0", role: "grid" });
  frame.append(svg);
  const help = document.createElement("p");
  help.textContent =
    "Click or arrow keys: look at a pair. Shift-click, or a click on a row or column name: mark pairs for one decision. Esc: clear the marks.";
  root.append(frame, legend(model.get("_legend")), help);
  el.append(root);

  const prefix = `well-${Math.random().toString(36).slice(2)}`;
  let wells = new Map();
  const key = (row, column) => `${row},${column}`;

  const build = () => {
    const rows = model.get("_row_names");
    const columns = model.get("_column_names");
    const step = columns.length > MANY_COLUMNS ? NARROW : WIDE;
    const longest = (names) => Math.max(1, ...names.map((name) => shortened(name).length));
    const left = longest(rows) * LETTER + 12;
    // Column names lean back by 60 degrees.
    const lean = longest(columns) > 3;
    const top = lean ? longest(columns) * LETTER * 0.87 + 14 : 20;
    const overhang = lean ? longest(columns) * LETTER * 0.5 : 0;
    const width = left + columns.length * step + overhang + 4;
    const height = top + rows.length * step + 4;
    svg.setAttribute("width", width);
    svg.setAttribute("height", height);
    svg.setAttribute("viewBox", `0 0 ${width} ${height}`);
    svg.setAttribute("aria-label", model.get("name"));
    svg.replaceChildren();
    rows.forEach((name, i) => {
      const y = top + (i + 0.5) * step + 4;
      svg.append(label(name, { x: left - 8, y, "text-anchor": "end" }, () => markLine((c) => c[0] === i)));
    });
    columns.forEach((name, j) => {
      const x = left + (j + 0.5) * step;
      const place = lean
        ? { transform: `translate(${x + 3} ${top - 6}) rotate(-60)` }
        : { x, y: top - 6, "text-anchor": "middle" };
      svg.append(label(name, place, () => markLine((c) => c[1] === j)));
    });
    const taken = new Set(model.get("_cells").map((cell) => key(cell[0], cell[1])));
    rows.forEach((_, i) => columns.forEach((__, j) => {
      if (taken.has(key(i, j))) return;
      svg.append(make("circle", { class: "empty", cx: left + (j + 0.5) * step, cy: top + (i + 0.5) * step, r: step * 0.3 }));
    }));
    wells = new Map();
    for (const [row, column, verdict, choice, decided, words] of model.get("_cells")) {
      const x = left + column * step;
      const y = top + row * step;
      const group = make("g", {
        class: "well", role: "gridcell", id: `${prefix}-${row}-${column}`, "aria-label": words,
        "data-row": row, "data-column": column, transform: `translate(${x} ${y})`,
      });
      group.append(make("title", {}, words), make("rect", { class: "hit", x: 1, y: 1, width: step - 2, height: step - 2, rx: 4 }));
      const drawn = glyph(verdict, choice, decided);
      drawn.setAttribute("transform", `translate(${step / 2} ${step / 2}) scale(${step / WIDE})`);
      group.append(drawn);
      group.addEventListener("click", (event) => (event.shiftKey ? toggle(row, column) : look(row, column)));
      svg.append(group);
      wells.set(key(row, column), group);
    }
    svg.append(make("rect", { class: "cursor", width: step - 2, height: step - 2, rx: 4, visibility: "hidden" }));
    point();
    mark();
  };

  const label = (name, place, act) => {
    const text = make("text", { ...place, class: "name" }, shortened(name));
    text.append(make("title", {}, `${name}: mark all its pairs`));
    text.addEventListener("click", act);
    return text;
  };

  const look = (row, column) => {
    model.set("_cursor", [row, column]);
    model.save_changes();
    svg.focus({ preventScroll: true });
  };
  const setMarks = (marks) => {
    model.set("_marked", marks);
    model.save_changes();
  };
  const toggle = (row, column) => {
    const others = model.get("_marked").filter((m) => m[0] !== row || m[1] !== column);
    setMarks(others.length < model.get("_marked").length ? others : [...others, [row, column]]);
  };
  const markLine = (belongs) => {
    const line = model.get("_cells").filter(belongs).map((c) => [c[0], c[1]]);
    const inLine = new Set(line.map((m) => key(...m)));
    const others = model.get("_marked").filter((m) => !inLine.has(key(...m)));
    const all = model.get("_marked").length - others.length === line.length;
    setMarks(all ? others : [...others, ...line]);
  };

  const point = () => {
    const cursor = svg.querySelector(".cursor");
    const well = wells.get(key(...model.get("_cursor")));
    if (!cursor) return;
    cursor.setAttribute("visibility", well ? "visible" : "hidden");
    svg.removeAttribute("aria-activedescendant");
    if (!well) return;
    const [x, y] = well.getAttribute("transform").match(/[\d.]+/g).map(Number);
    cursor.setAttribute("x", x + 1);
    cursor.setAttribute("y", y + 1);
    svg.setAttribute("aria-activedescendant", well.id);
  };
  const mark = () => {
    const marked = new Set(model.get("_marked").map((m) => key(...m)));
    for (const [place, well] of wells) well.classList.toggle("marked", marked.has(place));
  };

  const steps = { ArrowUp: [-1, 0], ArrowDown: [1, 0], ArrowLeft: [0, -1], ArrowRight: [0, 1] };
  svg.addEventListener("keydown", (event) => {
    const [row, column] = model.get("_cursor").length ? model.get("_cursor") : [0, 0];
    if (steps[event.key]) {
      const [down, right] = steps[event.key];
      const rows = model.get("_row_names").length;
      const columns = model.get("_column_names").length;
      let [i, j] = [row + down, column + right];
      while (i >= 0 && j >= 0 && i < rows && j < columns && !wells.has(key(i, j))) [i, j] = [i + down, j + right];
      if (wells.has(key(i, j))) look(i, j);
    } else if (event.key === " ") {
      toggle(row, column);
    } else if (event.key === "Escape") {
      setMarks([]);
    } else {
      return;
    }
    event.preventDefault();
    event.stopPropagation();
  });

  build();
  const rebuilt = ["_cells", "_row_names", "_column_names"].map((name) => `change:${name}`).join(" ");
  model.on(rebuilt, build);
  model.on("change:_cursor", point);
  model.on("change:_marked", mark);
  return () => {
    model.off(rebuilt, build);
    model.off("change:_cursor", point);
    model.off("change:_marked", mark);
  };
}

function legend(entries) {
  const list = document.createElement("ul");
  for (const [verdict, choice, decided, words] of entries) {
    const item = document.createElement("li");
    const picture = make("svg", { width: 24, height: 24, viewBox: "-12 -12 24 24", "aria-hidden": "true" });
    picture.append(glyph(verdict, choice, decided));
    item.append(picture, document.createTextNode(words));
    list.append(item);
  }
  return list;
}

export default { render };
