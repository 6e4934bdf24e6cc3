// A drawing in micrometres of the board that can be moved and zoomed with pointer, fingers, wheel and keys.

class Picture {
  // `extent`: x, y, width, height shown at first. `told`: called with micrometres a pixel whenever that changes.
  constructor({ label, extent, height, width = 0, told = () => {}, still = false }) {
    this.home = widened(extent, 0.04);
    this.view = [...this.home];
    this.told = () => {};
    // On paper nothing can be measured, as paper is laid out after it is drawn.
    this.size = still ? [width, height] : null;
    this.body = shape("g");
    this.marks = shape("g");
    this.svg = shape("svg", { class: "board-picture", role: "group", "aria-label": label, height, preserveAspectRatio: "xMidYMid meet" }, this.body, this.marks);
    this.place = make("output", { class: "coordinates", "aria-label": "Coordinates under the pointer" });
    this.element = make("div", { class: "frame" }, this.svg);
    if (!still) this.listen();
    this.show();
    this.told = told;
  }

  listen() {
    this.svg.setAttribute("tabindex", "0");
    this.element.append(make("div", { class: "frame-foot" }, make("span", { class: "zooms" },
      make("button", { type: "button", "aria-label": "Zoom in", onclick: () => this.zoom(1 / 1.5) }, "+"),
      make("button", { type: "button", "aria-label": "Zoom out", onclick: () => this.zoom(1.5) }, "−"),
      make("button", { type: "button", onclick: () => this.look(this.home) }, "All")), this.place));
    const fingers = new Map();
    let moved = 0;
    this.svg.addEventListener("pointerdown", (event) => {
      fingers.set(event.pointerId, [event.clientX, event.clientY]);
      moved = 0;
    });
    this.svg.addEventListener("pointermove", (event) => {
      const [x, y] = this.at(event);
      this.place.textContent = coordinates(x, y);
      const before = fingers.get(event.pointerId);
      if (!before) return;
      const now = [event.clientX, event.clientY];
      moved += Math.hypot(now[0] - before[0], now[1] - before[1]);
      // Only a move takes the pointer; a mere press stays a click on what lies under it.
      if (moved > 4 && !this.svg.hasPointerCapture(event.pointerId)) this.svg.setPointerCapture(event.pointerId);
      const others = [...fingers].filter(([id]) => id !== event.pointerId);
      if (others.length === 1) {
        const other = others[0][1];
        const span = (at) => Math.max(Math.hypot(at[0] - other[0], at[1] - other[1]), 8);
        this.zoom(span(before) / span(now), this.at({ clientX: (now[0] + other[0]) / 2, clientY: (now[1] + other[1]) / 2 }));
      } else {
        this.move((before[0] - now[0]) * this.scale, (before[1] - now[1]) * this.scale);
      }
      fingers.set(event.pointerId, now);
    });
    const end = (event) => fingers.delete(event.pointerId);
    for (const kind of ["pointerup", "pointercancel", "pointerleave"]) this.svg.addEventListener(kind, end);
    this.svg.addEventListener("click", (event) => { if (moved > 4) event.stopPropagation(); }, true);
    this.svg.addEventListener("wheel", (event) => {
      // A page that is being scrolled past must not be caught by a picture.
      if (!event.ctrlKey && document.activeElement !== this.svg) return;
      event.preventDefault();
      this.zoom(Math.exp(event.deltaY * (event.deltaMode ? 0.05 : 0.0015)), this.at(event));
    }, { passive: false });
    this.svg.addEventListener("keydown", (event) => {
      if (event.ctrlKey || event.altKey || event.metaKey) return;
      const [, , w, h] = this.view;
      const act = {
        ArrowLeft: () => this.move(-w / 8, 0), ArrowRight: () => this.move(w / 8, 0),
        ArrowUp: () => this.move(0, -h / 8), ArrowDown: () => this.move(0, h / 8),
        "+": () => this.zoom(1 / 1.5), "=": () => this.zoom(1 / 1.5), "-": () => this.zoom(1.5), 0: () => this.look(this.home),
      }[event.key];
      if (!act) return;
      event.preventDefault();
      act();
    });
    new ResizeObserver(() => this.tell()).observe(this.svg);
  }

  get scale() {
    const box = this.svg.getBoundingClientRect();
    const [width, height] = this.size || [box.width, box.height];
    return Math.max(this.view[2] / Math.max(width, 1), this.view[3] / Math.max(height, 1));
  }

  at(event) {
    const point = new DOMPoint(event.clientX, event.clientY).matrixTransform(this.svg.getScreenCTM().inverse());
    return [point.x, point.y];
  }

  look(box) {
    this.view = [...box];
    this.show();
  }

  move(dx, dy) { this.look([this.view[0] + dx, this.view[1] + dy, this.view[2], this.view[3]]); }

  zoom(factor, about) {
    const [x, y, w, h] = this.view;
    const least = 100 / Math.max(w, h);
    const most = (4 * Math.max(this.home[2], this.home[3])) / Math.max(w, h);
    const by = Math.min(Math.max(factor, least), most);
    const [cx, cy] = about || [x + w / 2, y + h / 2];
    this.look([cx - (cx - x) * by, cy - (cy - y) * by, w * by, h * by]);
  }

  // Shows a place in the middle, no wider than `span` micrometres.
  goTo(x, y, span) {
    const w = Math.min(this.view[2], span);
    const h = (w * this.view[3]) / this.view[2];
    this.look([x - w / 2, y - h / 2, w, h]);
  }

  show() {
    this.svg.setAttribute("viewBox", this.view.map((value) => Math.round(value)).join(" "));
    this.tell();
  }

  tell() { if (this.size || this.svg.isConnected) this.told(this.scale); }
}

function widened([x, y, w, h], share) {
  const by = Math.max(w, h) * share;
  return [x - by, y - by, w + 2 * by, h + 2 * by];
}

// A numbered sign whose size on the screen stays the same; its tip is the place.
function pin(kind, text) {
  const foot = shape("path", { class: "pin-foot", d: "M0 0L0-9" });
  const head = shape("g", { transform: "translate(0 -19)" }, shape("path", { class: "pin-form", d: FORMS[kind] || FORMS.note }),
    shape("text", { y: kind === "review" ? 6 : 4.2 }, text));
  return Object.assign(shape("g", { class: `pin ${kind}` }, foot, head), { foot, head });
}

// Sets pins at their places without one covering another: a covered one moves aside and keeps its foot on the place.
function settle(pins, scale) {
  const taken = [];
  const steps = [[0, 0], [24, -6], [-24, -6], [0, -26], [26, -30], [-26, -30], [46, 2], [-46, 2], [0, -52], [50, -28], [-50, -28], [26, -56], [-26, -56]];
  for (const { element, x, y } of pins) {
    const [px, py] = [x / scale, y / scale];
    const free = steps.find(([dx, dy]) => taken.every(([tx, ty]) => Math.hypot(px + dx - tx, py + dy - ty) > 23)) || [0, 0];
    taken.push([px + free[0], py + free[1]]);
    element.setAttribute("transform", `translate(${x} ${y}) scale(${scale})`);
    element.foot.setAttribute("d", `M0 0L${free[0]} ${free[1] - 9}`);
    element.head.setAttribute("transform", `translate(${free[0]} ${free[1] - 19})`);
  }
}
