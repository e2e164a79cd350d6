"use strict";
(() => {
  const data = JSON.parse(document.getElementById("data").textContent);
  const byId = (id) => document.getElementById(id);
  const quantities = new Map(data.quantities.map((q) => [q.key, q]));
  const count = data.roles.length;
  const state = { shown: data.first, held: -1, box: null };
  const views = {};
  const ERRORS_ONLY = 1;

  const element = (name, text, attributes = {}) => {
    const made = document.createElement(name);
    if (text !== undefined) made.textContent = text;
    for (const [key, value] of Object.entries(attributes)) made.setAttribute(key, value);
    return made;
  };
  const number = (value, digits) => (value === null ? "–" : value.toFixed(digits).replace("-", "−"));
  const label = (q) => (q.unit ? `${q.words} (${q.unit})` : q.words);
  const nameOf = (row) => `Design ${row + 1}` + (data.roles[row] ? `: ${data.roles[row]}` : "");
  const chosen = (id) => quantities.get(byId(id).value);

  function fillSelects() {
    for (const [id, first] of Object.entries(data.axes)) {
      for (const q of data.quantities) byId(id).append(element("option", label(q), { value: q.key }));
      byId(id).value = first;
      byId(id).addEventListener("change", axesChanged);
    }
    byId("held").append(element("option", "none", { value: -1 }));
    data.roles.forEach((role, row) => {
      if (role) byId("held").append(element("option", role, { value: row }));
    });
    byId("held").addEventListener("change", () => { state.held = Number(byId("held").value); show(); });
    byId("previous").addEventListener("click", () => step(-1));
    byId("next").addEventListener("click", () => step(1));
  }

  const step = (by) => { state.shown = (state.shown + by + count) % count; show(); };

  function designRows() {
    const named = data.roles.map((role, row) => (role ? row : -1)).filter((row) => row >= 0);
    return data.roles.map((role, row) => {
      const made = { id: row + 1, role, order: named.indexOf(row) };
      for (const q of data.quantities) made[q.key] = q.values[row];
      return made;
    });
  }

  function inBox(row) {
    if (!state.box) return true;
    return ["across", "upwards"].every((id, i) => {
      const [low, high] = state.box[i], value = chosen(id).values[row];
      return value !== null && value >= low && value <= high;
    });
  }

  function list() {
    const columns = [...new Set([chosen("upwards"), chosen("across"), quantities.get("smallest_margin")])].filter(Boolean);
    const head = element("tr");
    head.append(element("th", "Design", { scope: "col" }));
    for (const q of columns) head.append(element("th", label(q), { scope: "col", class: "number" }));
    byId("list-head").replaceChildren(head);
    const rows = data.roles.map((_, row) => row).filter(inBox);
    byId("list").replaceChildren(...rows.map((row) => {
      const line = element("tr", undefined, { "data-row": row });
      const button = element("button", String(row + 1), { type: "button", "aria-label": `Show ${nameOf(row)}` });
      button.addEventListener("click", () => { state.shown = row; show(); });
      const first = element("td");
      first.append(button, " ", data.roles[row]);
      line.append(first, ...columns.map((q) => element("td", number(q.values[row], q.decimals), { class: "number" })));
      return line;
    }));
    byId("list-count").textContent = rows.length === count ? `${count} designs` : `${rows.length} of ${count} designs in the box`;
    mark();
  }

  function mark() {
    for (const line of byId("list").rows) {
      const current = Number(line.dataset.row) === state.shown;
      line.setAttribute("aria-current", String(current));
      line.querySelector("button").setAttribute("aria-pressed", String(current));
    }
  }

  function axesChanged() {
    state.box = null;
    list();
    byId("painted-words").textContent = label(chosen("painted"));
    const view = views.front;
    if (!view) return;
    for (const id of ["across", "upwards", "painted"]) view.signal(id, chosen(id).key);
    for (const id of ["across", "upwards"]) view.signal(`${id}_words`, label(chosen(id)));
    // A box drawn on other axes means nothing on these.
    view.data("brush_store", []);
    view.runAsync();
  }

  const series = () => [["shown", state.shown], ["held", state.held]].filter(([, row]) => row >= 0);

  function cutRows(plane) {
    const rows = [];
    for (const [name, row] of series()) {
      const levels = data.cuts[plane][row];
      levels.forEach((tenths, i) => {
        if (tenths === null) return;
        const angle = (180 * i) / (levels.length - 1), level = tenths / 10;
        rows.push({ series: name, angle, level });
        if (i > 0 && i < levels.length - 1) rows.push({ series: name, angle: -angle, level });
      });
    }
    return rows;
  }

  function bandRows(figure) {
    const rows = [];
    for (const [name, row] of series()) {
      data.band[figure][row].forEach((value, i) => rows.push({ series: name, mhz: data.mhz[i], value }));
    }
    return rows;
  }

  // A picture's name is its kind and what it shows: polar_h, cut_e, band_gain_dbi.
  function rowsOf(name) {
    const [kind, ...rest] = name.split("_");
    return kind === "band" ? ["band", bandRows(rest.join("_"))] : ["cut", cutRows(rest[0])];
  }

  function tables(row) {
    for (const id of ["dimensions", "figures"]) {
      const here = data.quantities.filter((q) => (q.group === "figure") === (id === "figures"));
      byId(id).replaceChildren(...here.map((q) => {
        const line = element("tr");
        line.append(element("th", label(q), { scope: "row" }), element("td", number(q.values[row], q.decimals), { class: "number" }));
        return line;
      }));
    }
    byId("margins").replaceChildren(...data.limits.map((limit, i) => {
      const margin = data.margins[row][i], line = element("tr"), met = margin.steps >= 0;
      const bar = element("span", undefined, { class: met ? "bar" : "bar missed", role: "presentation" });
      const fill = element("i");
      fill.style.width = `${Math.min(100, 20 * Math.abs(margin.steps))}%`;
      bar.append(fill);
      const cell = element("td", undefined, { class: "gauge" });
      cell.append(bar);
      line.append(
        element("th", limit.words, { scope: "row" }), element("td", limit.asked),
        element("td", margin.reached, { class: "number" }),
        element("td", `${margin.margin} ${met ? "✓" : "✗"}`, { class: met ? "number" : "number missed" }), cell);
      return line;
    }));
  }

  function show() {
    const row = state.shown;
    byId("design-name").textContent = nameOf(row);
    // Drawings are made of numbers by the program that wrote this page.
    byId("sketch").innerHTML = data.sketches[row];
    byId("key").hidden = state.held < 0;
    if (state.held >= 0) byId("held-name").textContent = data.roles[state.held];
    tables(row);
    mark();
    if (views.front) views.front.signal("picked", row + 1).runAsync();
    for (const [name, view] of Object.entries(views)) {
      if (name === "front") continue;
      view.data(...rowsOf(name)).runAsync();
    }
  }

  async function draw(name, id, sets) {
    const specification = data.charts[name];
    specification.datasets = { ...(specification.datasets || {}), ...sets };
    const made = await vegaEmbed(byId(id), specification, {
      mode: "vega-lite", logLevel: ERRORS_ONLY, renderer: "svg", actions: false, ast: true, defaultStyle: false,
    });
    views[name] = made.view;
  }

  async function start() {
    fillSelects();
    list();
    byId("painted-words").textContent = label(chosen("painted"));
    show();
    await draw("front", "front-chart", { designs: designRows(), limits: data.limit_lines });
    axesChanged();
    const view = views.front;
    view.addSignalListener("choice", (_, value) => {
      if (value && value.id && value.id.length) { state.shown = value.id[0] - 1; show(); }
    });
    view.addSignalListener("brush", (_, box) => {
      state.box = box && box.x && box.y ? [box.x, box.y].map((ends) => [Math.min(...ends), Math.max(...ends)]) : null;
      list();
    });
    for (const name of Object.keys(data.charts)) {
      if (name !== "front") await draw(name, name.replace("_", "-"), Object.fromEntries([rowsOf(name)]));
    }
    show();
    document.body.dataset.ready = "yes";
  }

  start();
})();
