// Keeps the diagrams of a page between reruns. The background (domes, lines, axes) arrives in one
// element, what moves in another; a change then touches the moving traces only.

const grounds = new Map(); // name -> background, the newest few
const boards = new Map(); // key -> Board; one that has left the page keeps its drawings and comes back with them

const touch = matchMedia("(pointer: coarse)").matches; // there a finger on a diagram must scroll the page
const SETTINGS = {
  displaylogo: false,
  showSendToCloud: false, // nothing leaves the machine
  showTips: false,
  doubleClick: false, // ours goes back to the process
  displayModeBar: touch ? false : "hover",
  modeBarButtons: [["zoom2d", "pan2d", "toImage"]],
};
const POINTS = new Set(["x", "y", "text", "hovertext", "customdata"]); // what a step may change in a trace
const AT_ONCE = { duration: 0, easing: "linear" };
const VIEW = /^[xy]axis\d*\.range\[/; // how Plotly names what the reader has zoomed or moved
const FAILED = "The diagrams could not be drawn; the numbers on this page do not depend on them. Reload to try again.";

const here = (file) => new URL(file + new URL(import.meta.url).search, import.meta.url).href;

function load(tag, attributes) {
  return new Promise((resolve, reject) => {
    const element = Object.assign(document.createElement(tag), attributes);
    element.onload = resolve;
    element.onerror = () => reject(new Error(`${element.src || element.href} did not load`));
    document.head.append(element);
  });
}

const styled = load("link", { rel: "stylesheet", href: here("live.css") }).catch(console.warn);

let library;
function plotly() {
  const src = import.meta.url.replace(/\.assets\/.*/, ".plotly/plotly.min.js");
  library ??= load("script", { src })
    .then(() => window.Plotly)
    .catch((error) => {
      library = undefined; // the next change tries again
      throw error;
    });
  return library;
}

// ---- what Streamlit calls

export function background({ data, parentElement }) {
  parentElement.closest("[data-testid=stElementContainer]").style.display = "none"; // it shows nothing itself
  const { name, ground } = JSON.parse(data);
  grounds.delete(name); // last in the order of insertion: the newest
  grounds.set(name, ground);
  if (grounds.size > 12) grounds.delete(grounds.keys().next().value);
  boards.forEach((board) => board.wanted.background === name && board.draw());
}

export function diagrams({ data, parentElement }) {
  const wanted = JSON.parse(data);
  const { key, enlarged } = wanted.settings;
  if (!boards.has(key)) boards.set(key, new Board(enlarged));
  const board = boards.get(key);
  board.wanted = wanted;
  board.mount(parentElement);
  board.draw();
  return () => board.leave(parentElement);
}

// ---- colours

function theme(element, tokens) {
  const style = getComputedStyle(element);
  const page = Object.values(tokens).map(({ css }) => (css ? style.getPropertyValue(css).trim() : ""));
  const kind = isDark(style.getPropertyValue("--st-background-color")) ? "dark" : "light";
  const colours = new Map(Object.keys(tokens).map((name, i) => [name, page[i] || tokens[name][kind]]));
  return {
    name: [...colours.values()].join(),
    colour(token) {
      const [name, opacity] = token.split("/");
      return opacity ? `rgba(${channels(colours.get(name)).join()},${opacity})` : colours.get(name);
    },
  };
}

function channels(colour) {
  const pen = document.createElement("canvas").getContext("2d");
  pen.fillStyle = colour;
  pen.fillRect(0, 0, 1, 1);
  return pen.getImageData(0, 0, 1, 1).data.slice(0, 3);
}

const darkness = new Map();
function isDark(colour) {
  if (!darkness.has(colour)) {
    const [red, green, blue] = channels(colour);
    darkness.set(colour, 0.3 * red + 0.6 * green + 0.1 * blue < 128);
  }
  return darkness.get(colour);
}

// A copy of a figure's part with real colours; arrays of numbers are shared, not copied.
function painted(part, colour) {
  if (typeof part === "string") return part.startsWith("var:") ? colour(part.slice(4)) : part;
  if (Array.isArray(part)) {
    const plain = part.every((item) => item === null || typeof item === "number");
    return plain ? part : part.map((item) => painted(item, colour));
  }
  if (part === null || typeof part !== "object") return part;
  return Object.fromEntries(Object.entries(part).map(([name, value]) => [name, painted(value, colour)]));
}

// ---- a row of diagrams

class Board {
  constructor(enlarged) {
    this.enlarged = enlarged;
    this.plots = new Map();
    this.drawn = 0;
    this.root = document.createElement("div");
    this.root.className = "diagrams";
    this.sizes = new ResizeObserver((changes) => {
      changes.forEach(({ target }) => this.plots.get(target.dataset.key)?.fit());
    });
    document.addEventListener("keydown", ({ key, defaultPrevented }) => {
      if (key !== "Escape" || defaultPrevented || document.querySelector("[role=dialog]")) return;
      if (this.enlarged && this.root.isConnected) this.enlarge(null);
    });
  }

  mount(parent) {
    if (this.root.parentElement !== parent) parent.append(this.root);
  }

  // Streamlit may have put the diagrams elsewhere on the page before it takes them away here.
  leave(parent) {
    if (this.root.parentElement === parent) this.root.remove();
  }

  enlarge(key) {
    this.enlarged = key;
    this.arrange();
    this.root.scrollIntoView({ block: "nearest" });
    this.draw(); // those that were out of sight have not followed
  }

  arrange() {
    if (!this.plots.has(this.enlarged)) this.enlarged = null;
    this.root.classList.toggle("enlarged", Boolean(this.enlarged));
    this.plots.forEach((plot) => plot.show(this.enlarged));
  }

  // Draws the newest state; a state that arrives meanwhile waits, and only the last one waiting is drawn.
  async draw() {
    if (this.drawing) {
      this.again = true;
      return;
    }
    this.drawing = true;
    try {
      do {
        this.again = false;
        const ground = grounds.get(this.wanted.background);
        if (!ground) break; // it is on its way and calls draw() when it arrives
        this.furnish();
        const [Plotly] = await Promise.all([plotly(), styled]);
        if (this.root.isConnected) this.step(Plotly, ground);
      } while (this.again);
    } catch (error) {
      this.fail(error);
    } finally {
      this.drawing = false;
    }
  }

  step(Plotly, ground) {
    const colours = theme(this.root, ground.tokens);
    for (const moving of this.wanted.diagrams) {
      const plot = this.plots.get(moving.key);
      if (!plot.section.hidden) plot.draw(Plotly, { moving, colours, ground: ground.diagrams[moving.key] });
    }
    this.root.querySelector("[role=alert]")?.remove();
    this.root.dataset.drawn = ++this.drawn;
  }

  // The frames of the diagrams, in the order asked for.
  furnish() {
    const { height, columns } = this.wanted.settings;
    this.root.style.setProperty("--height", `${height}px`);
    this.root.style.setProperty("--columns", columns);
    const keys = this.wanted.diagrams.map(({ key }) => key);
    const changed = keys.join() !== [...this.plots.keys()].join();
    if (changed) {
      const old = this.plots;
      this.plots = new Map(keys.map((key) => [key, old.get(key) ?? new Plot(this, key)]));
      old.forEach((plot, key) => this.plots.has(key) || plot.close());
      this.plots.forEach((plot) => {
        this.root.append(plot.section);
        this.sizes.observe(plot.stage);
      });
    }
    this.wanted.diagrams.forEach((moving) => this.plots.get(moving.key).name(moving));
    if (changed) this.arrange();
  }

  fail(error) {
    console.warn("diagrams:", error);
    const labels = this.wanted.diagrams.map(({ title, label }) => `${title}: ${label}`);
    const message = this.root.querySelector("[role=alert]") ?? document.createElement("p");
    message.setAttribute("role", "alert");
    message.textContent = `${FAILED} ${labels.join(". ")}`;
    this.root.prepend(message);
  }
}

// ---- one diagram

class Plot {
  constructor(board, key) {
    this.board = board;
    this.key = key;
    this.choice = { view: "process" };
    this.section = document.createElement("div");
    this.section.className = "diagram";
    this.section.setAttribute("role", "figure");
    this.section.innerHTML = `
      <header><h4></h4>
        <div role="group" aria-label="View">
          <button type="button" data-view="process">Process</button>
          <button type="button" data-view="whole">Whole dome</button>
        </div>
        <button type="button" data-enlarge>Enlarge</button>
      </header>
      <div class="stage"></div>`;
    this.heading = this.section.querySelector("h4");
    this.stage = this.section.querySelector(".stage");
    this.stage.dataset.key = key;
    this.views = [...this.section.querySelectorAll("[data-view]")];
    this.views.forEach((button) => (button.onclick = () => this.choose({ view: button.dataset.view })));
    this.enlarge = this.section.querySelector("[data-enlarge]");
    this.enlarge.onclick = () => board.enlarge(board.enlarged ? null : key);
  }

  close() {
    if (this.ground) window.Plotly.purge(this.stage);
    this.section.remove();
  }

  name({ title, label, layout }) {
    if (this.heading.textContent !== title) this.heading.textContent = title;
    this.section.setAttribute("aria-label", label || title);
    this.section.querySelector("[role=group]").hidden = !(layout.meta?.process && layout.meta?.whole);
  }

  show(enlarged) {
    this.section.hidden = Boolean(enlarged) && enlarged !== this.key;
    this.enlarge.textContent = enlarged ? "Back" : "Enlarge";
    this.enlarge.setAttribute("aria-label", enlarged ? "Back to all diagrams" : `Enlarge ${this.heading.textContent}`);
  }

  choose(choice) {
    this.choice = choice;
    this.mark();
    if (choice.view !== "own") this.board.draw();
  }

  mark() {
    this.views.forEach((button) => button.setAttribute("aria-pressed", button.dataset.view === this.choice.view));
  }

  draw(Plotly, { moving, colours, ground }) {
    const { annotations, shapes } = moving.layout;
    const look = JSON.stringify([moving.traces, annotations, shapes], (name, value) => (POINTS.has(name) ? "" : value));
    const axes = JSON.stringify([ground.layout.xaxis?.title, ground.layout.yaxis?.title]);
    if (this.choice.view === "own" && this.choice.axes !== axes) this.choose({ view: "process" }); // other units now
    const same = this.ground === ground && this.look === look && this.theme === colours.name;
    Object.assign(this, { ground, look, axes, theme: colours.name });

    const traces = painted(moving.traces, colours.colour).map(present);
    const ranges = this.choice.ranges ?? moving.layout.meta?.[this.choice.view] ?? {};
    if (!same || !this.moved(Plotly, traces, ranges)) {
      const layout = { ...ground.layout, ...moving.layout };
      this.build(Plotly, traces, ranges, painted({ ...ground, layout }, colours.colour));
    }
    this.mark();
  }

  moved(Plotly, traces, ranges) {
    try {
      return this.move(Plotly, traces, ranges);
    } catch (error) {
      console.warn("diagrams: drawn the long way,", error);
      return false;
    }
  }

  // The fast way: a millisecond or two where Plotly's own ways take 15 (animate) to 30 (react), most of it
  // spent on looking through attributes that have not changed. It uses parts of Plotly that are not promised,
  // so whatever is not as expected there falls back on building.
  move(Plotly, traces, ranges) {
    const { moving } = this.ground;
    const { _fullData: full, _fullLayout: layout, data, calcdata } = this.stage;
    const change = this.rangeChange(ranges, layout);
    if (!change || !moving.every((position) => full[position].type === "scatter")) return false;
    traces.forEach((trace, i) => {
      const position = moving[i];
      const points = Object.fromEntries(Object.entries(trace).filter(([name]) => POINTS.has(name)));
      const target = Object.assign(full[position], points, { _length: Math.min(trace.x.length, trace.y.length) });
      Object.assign(data[position], points);
      calcdata[position] = target._module.calc(this.stage, target);
      Object.assign(calcdata[position][0], { t: {}, trace: target });
    });
    this.ranges = ranges;
    if (Object.keys(change).length) Plotly.relayout(this.stage, change); // draws all traces
    else layout._basePlotModules.forEach((module) => module.plot(this.stage, moving, AT_ONCE, () => () => {}));
    return true;
  }

  // What to tell Plotly so that the axes show the ranges, or follow the data where none are given; null: build anew.
  rangeChange(ranges, { xaxis, yaxis }) {
    if (JSON.stringify(ranges) !== JSON.stringify(this.ranges)) return Object.keys(ranges).length ? own(ranges) : null;
    const change = {};
    if (xaxis.autorange) change["xaxis.autorange"] = xaxis.autorange;
    if (yaxis.autorange) change["yaxis.autorange"] = yaxis.autorange;
    return change;
  }

  build(Plotly, traces, ranges, { data, moving, layout }) {
    moving.forEach((position, i) => (data[position] = traces[i]));
    for (const [path, range] of Object.entries(own(ranges))) {
      const axis = path.split(".")[0];
      layout[axis] = { ...layout[axis], range, autorange: false };
    }
    if (touch) layout.dragmode = false;
    const first = !this.stage.on;
    this.ranges = ranges;
    Plotly.react(this.stage, data, layout, { ...SETTINGS, toImageButtonOptions: { filename: this.key, scale: 2 } });
    if (!first) return;
    this.stage.on("plotly_relayout", (change) => this.looked(change));
    this.stage.on("plotly_doubleclick", () => this.choose({ view: "process" }));
  }

  // The reader has zoomed or moved the view; changes of ours are named otherwise.
  looked(change) {
    if (!Object.keys(change).some((name) => VIEW.test(name))) return;
    const { xaxis, yaxis } = this.stage._fullLayout;
    this.ranges = own({ "xaxis.range": xaxis.range, "yaxis.range": yaxis.range });
    this.choose({ view: "own", ranges: this.ranges, axes: this.axes });
  }

  fit() {
    const { clientWidth: width, clientHeight: height } = this.stage;
    const { width: w, height: h } = this.stage._fullLayout ?? {};
    if (w && width && (w !== width || h !== height)) window.Plotly.Plots.resize(this.stage);
  }
}

// A trace without points would vanish and have to be built anew; one missing point keeps its place.
const present = (trace) => (trace.x?.length === 0 ? { ...trace, x: [null], y: [null] } : trace);

// Ranges as Plotly takes them; it keeps and changes the arrays it is given.
const own = (ranges) => Object.fromEntries(Object.entries(ranges).map(([path, range]) => [path, [...range]]));
