"use strict";
// Looks up cells in the tables of the page. A table is unpacked when it is first asked for. Texts are only ever set
// as text, never as markup.
(() => {
  const meta = JSON.parse(document.getElementById("meta").textContent);
  const KINDS = ["vertex", "edge", "face", "node", "link"];
  const MANY = { vertex: "vertices", edge: "edges", face: "faces", node: "nodes", link: "links" };
  const D = meta.dimension, K = D + 1, W = meta.pairs.length;
  const C = meta.counts;
  const INNER = { edge: C.edges_internal, face: C.faces_internal };
  const TOTAL = {
    vertex: C.vertices, edge: C.edges_internal + C.edges_external, face: C.faces_internal + C.faces_external,
    node: C.nodes, link: C.links,
  };
  const PAGE = 20, LONG = 400, HITS = 60;
  const byId = (id) => document.getElementById(id);

  // -- tables ------------------------------------------------------------------------------------

  const store = new Map();
  const has = (name) => document.querySelector(`script[data-table="${name}"]`) !== null;

  function table(name) {
    if (!store.has(name)) store.set(name, unpack(name));
    return store.get(name);
  }

  async function unpack(name) {
    const element = document.querySelector(`script[data-table="${name}"]`);
    if (element === null) return null;
    const text = atob(element.textContent);
    const bytes = new Uint8Array(text.length);
    for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
    const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("gzip"));
    const raw = new Uint8Array(await new Response(stream).arrayBuffer());
    if (element.dataset.type === "Int8") return new Int8Array(raw.buffer);
    if (element.dataset.type === "Float64") return new Float64Array(raw.buffer);
    const n = raw.length / 4, out = new Int32Array(n);
    for (let i = 0; i < n; i++) out[i] = raw[i] | (raw[n + i] << 8) | (raw[2 * n + i] << 16) | (raw[3 * n + i] << 24);
    return out;
  }

  async function tables(...names) {
    return Promise.all(names.map(table));
  }

  // where the lists of faces begin
  const offsets = new Map();
  async function starts(item) {
    if (!offsets.has(item)) {
      const count = await table(`faces/${item}_count`);
      const at = new Float64Array(count.length + 1);
      for (let i = 0; i < count.length; i++) at[i + 1] = at[i] + count[i];
      offsets.set(item, at);
    }
    return offsets.get(item);
  }

  // the row of a cell in its tables, -1 where the page does not hold it
  async function row(kind, number) {
    if (meta.whole) return number >= 0 && number < TOTAL[kind] ? number : -1;
    const numbers = await table(`numbers/${kind}`);
    let low = 0, high = numbers.length - 1;
    while (low <= high) {
      const middle = (low + high) >> 1;
      if (numbers[middle] === number) return middle;
      if (numbers[middle] < number) low = middle + 1; else high = middle - 1;
    }
    return -1;
  }

  async function numberAt(kind, index) {
    return meta.whole ? index : (await table(`numbers/${kind}`))[index];
  }

  // -- elements ----------------------------------------------------------------------------------

  function make(tag, content, attributes = {}) {
    const element = document.createElement(tag);
    for (const [key, value] of Object.entries(attributes)) element.setAttribute(key, value);
    const parts = Array.isArray(content) ? content : [content];
    for (const part of parts) if (part !== null && part !== undefined) element.append(part);
    return element;
  }

  const link = (kind, number) => make("a", `${kind} ${number}`, { href: `#${kind}-${number}` });

  function grid(caption, heads, rows) {
    const head = make("thead", make("tr", heads.map((x) => make("th", x, { scope: "col" }))));
    const body = make("tbody", rows.map((cells) => make("tr", cells.map((x) => make("td", x)))));
    return make("table", [make("caption", caption), head, body]);
  }

  function facts(rows) {
    return make("dl", rows.flatMap(([name, value]) => [make("dt", name), make("dd", value)]));
  }

  const signed = (x) => (x > 0 ? "+1" : "−1");

  async function labelsOf(v, without) {
    if (meta.labels === null) return null;
    const corners = await table("vertices/corners");
    const at = await row("vertex", v);
    if (at < 0) return null;
    const words = [];
    for (let c = 0; c < K; c++) if (!without.includes(c)) words.push(meta.labels[corners[at * K + c]]);
    return words.join(" ");
  }

  function end(pairs, at) {
    const [v, slot] = [pairs[2 * at], pairs[2 * at + 1]];
    return v < 0 ? [link("node", slot)] : [link("vertex", v), `, slot ${slot}`];
  }

  // -- cells -------------------------------------------------------------------------------------

  const show = {
    async vertex(v, at) {
      const [sign, part, edge, leaves, face, way, source, target] = await tables(
        "vertices/orientation", "vertices/component", "vertices/edge", "vertices/leaves", "wedges/face",
        "wedges/direction", "edges/source", "edges/target");
      const corners = await labelsOf(v, []);
      const head = [["orientation", signed(sign[at])], ["component", String(part[at])]];
      if (corners !== null) head.push(["corners", corners]);
      const slots = [];
      for (let i = 0; i < K; i++) {
        const e = edge[at * K + i], r = await row("edge", e);
        let behind = ["not in this sample"];
        if (r >= 0) {
          const here = source[2 * r] === v && source[2 * r + 1] === i;
          behind = end(here ? target : source, r);
        }
        slots.push([String(i), link("edge", e), leaves[at * K + i] > 0 ? "leaves" : "arrives", behind]);
      }
      const wedges = meta.pairs.map(([i, j], w) => [
        `${i} ${j}`, link("face", face[at * W + w]), way[at * W + w] > 0 ? `${i} to ${j}` : `${j} to ${i}`]);
      return [facts(head), grid("Edges, by slot", ["slot", "edge", "here it", "behind it"], slots),
        grid("Wedges", ["slots", "face", "passes from slot"], wedges)];
    },

    async edge(e, at) {
      const [source, target, twist, face, sign, sourceCorner, targetCorner] = await tables(
        "edges/source", "edges/target", "edges/twist", "edges/face", "edges/face_sign", "edges/source_corner",
        "edges/target_corner");
      const head = [["kind", e < INNER.edge ? "internal" : "external"], ["source", end(source, at)],
        ["target", end(target, at)], ["twist", twist[at] ? "1: the ends see opposite orientations" : "0"]];
      const home = source[2 * at] >= 0 ? source : target;
      const words = await labelsOf(home[2 * at], [home[2 * at + 1]]);
      if (words !== null) head.push(["labels", words]);
      const corner = (x) => (x < 0 ? "none" : String(x));
      const rows = [];
      for (let k = 0; k < D; k++) {
        const i = at * D + k;
        rows.push([String(k), link("face", face[i]), sign[i] > 0 ? "along" : "against", corner(sourceCorner[i]),
          corner(targetCorner[i])]);
      }
      return [facts(head), grid("Faces, by place", ["place", "face", "it runs", "source corner", "target corner"], rows)];
    },

    async face(f, at) {
      const [vertex, wedge, edge, sign, place, against, way] = await tables(
        "faces/vertex", "faces/wedge", "faces/edge", "faces/edge_sign", "faces/place", "faces/against",
        "wedges/direction");
      const [v0, e0] = [(await starts("vertex"))[at], (await starts("edge"))[at]];
      const n = (await table("faces/vertex_count"))[at];
      const closed = f < INNER.face;
      const head = [["kind", closed ? "internal" : "external"], ["vertices", String(n)]];
      const words = await labelsOf(vertex[v0], meta.pairs[wedge[v0]]);
      if (words !== null) head.push(["dual to", words]);
      if (!closed) head.push(["closed by", link("link", f - INNER.face)]);
      head.push(["internal edges run against", against[at] ? "odd in number" : "even in number"]);
      if (has("faces/singular")) {
        const singular = (await table("faces/singular"))[at];
        head.push(["ridge", ["regular", "with a holonomy", "pinched", "pinched, with a holonomy"][singular]]);
      }
      head.push(...(await spins(f, at, closed)));
      const rows = [];
      const vertexRow = async (k) => {
        const v = vertex[v0 + k], [i, j] = meta.pairs[wedge[v0 + k]], r = await row("vertex", v);
        const passes = r < 0 ? "not in this sample"
          : way[r * W + wedge[v0 + k]] > 0 ? `from slot ${i} to ${j}` : `from slot ${j} to ${i}`;
        return [link("vertex", v), passes];
      };
      const edgeRow = (k) => [link("edge", edge[e0 + k]),
        `${sign[e0 + k] > 0 ? "+1, along" : "−1, against"}, at place ${place[e0 + k]}`];
      const shown = Math.min(n, LONG);
      if (!closed) rows.push(edgeRow(0));
      for (let k = 0; k < shown; k++) {
        rows.push(await vertexRow(k));
        rows.push(edgeRow(closed ? k : k + 1));
      }
      const out = [facts(head), grid("In order", ["cell", "how the face passes"], rows)];
      if (shown < n) out.push(make("p", `The first ${shown} of ${n} vertices are shown.`));
      return out;
    },

    async node(n, at) {
      const [vertex, slot, sign, part, links, leaves] = await tables(
        "nodes/vertex", "nodes/slot", "nodes/orientation", "nodes/component", "nodes/link", "nodes/link_leaves");
      const [source, target] = await tables("links/source", "links/target");
      const head = [["orientation", signed(sign[at])], ["boundary component", String(part[at])],
        ["edge", link("edge", INNER.edge + n)], ["vertex", [link("vertex", vertex[at]), `, slot ${slot[at]}`]]];
      const words = await labelsOf(vertex[at], [slot[at]]);
      if (words !== null) head.push(["corners", words]);
      const rows = [];
      for (let k = 0; k < D; k++) {
        const l = links[at * D + k], out = leaves[at * D + k] > 0, r = await row("link", l);
        const other = r < 0 ? "not in this sample" : link("node", out ? target[r] : source[r]);
        rows.push([String(k), link("link", l), out ? "starts" : "ends", other]);
      }
      return [facts(head), grid("Links, by place", ["place", "link", "here it", "other end"], rows)];
    },

    async link(l, at) {
      const [source, target, twist] = await tables("links/source", "links/target", "links/twist");
      const face = INNER.face + l, r = await row("face", face);
      const head = [["source", link("node", source[at])], ["target", link("node", target[at])],
        ["face", link("face", face)], ["twist", String(twist[at])]];
      if (r >= 0) {
        const v0 = (await starts("vertex"))[r], [vertex, wedge] = await tables("faces/vertex", "faces/wedge");
        const words = await labelsOf(vertex[v0], meta.pairs[wedge[v0]]);
        if (words !== null) head.push(["corners", words]);
      }
      if (has("spins/boundary")) head.push(["twice-spin", String((await table("spins/boundary"))[at])]);
      return [facts(head)];
    },
  };

  // what the plan says of an internal face
  async function spins(f, at, closed) {
    if (!closed) {
      if (!has("spins/boundary")) return [];
      const r = await row("link", f - INNER.face);
      return r < 0 ? [] : [["twice-spin", String((await table("spins/boundary"))[r])]];
    }
    const [least, greatest, unbounded] = await tables("spins/least", "spins/greatest", "spins/unbounded");
    const out = [];
    const free = greatest !== null ? greatest[at] < 0 : unbounded !== null && unbounded[at] === 1;
    if (least !== null) out.push(["twice-spin", free ? `at least ${least[at]}` : `${least[at]} to ${greatest[at]}`]);
    if (free) out.push(["bound", make("span", "∞ unbounded", { class: "mark" })]);
    return out;
  }

  let turn = 0;
  async function open(kind, number, focus) {
    const mine = ++turn;
    const title = byId("cell-title"), body = byId("cell-body");
    let content;
    const at = await row(kind, number);
    if (!(number >= 0 && number < TOTAL[kind])) {
      content = [make("p", TOTAL[kind]
        ? `There is no ${kind} ${number}; numbers run from 0 to ${TOTAL[kind] - 1}.` : `There are no ${MANY[kind]}.`)];
    } else if (at < 0) {
      content = [make("p", "This cell is not in the sample that the page holds.")];
    } else {
      content = [around(kind, number), ...(await show[kind](number, at))];
    }
    if (mine !== turn) return;
    title.textContent = `${kind} ${number}`;
    body.replaceChildren(...content);
    if (focus) {
      title.focus({ preventScroll: true });
      byId("cell").scrollIntoView({ block: "nearest" });
    }
  }

  function around(kind, number) {
    const parts = [];
    if (number > 0) parts.push(make("a", `previous ${kind}`, { href: `#${kind}-${number - 1}` }));
    if (number + 1 < TOTAL[kind]) parts.push(make("a", `next ${kind}`, { href: `#${kind}-${number + 1}` }));
    return make("p", parts, { class: "line pager" });
  }

  // -- the list ----------------------------------------------------------------------------------

  const state = { kind: "vertex", page: 0 };

  const brief = {
    async vertex(v, at) {
      const [sign, edge] = await tables("vertices/orientation", "vertices/edge");
      const words = await labelsOf(v, []);
      return [signed(sign[at]), words ?? `edges ${edge.slice(at * K, at * K + K).join(" ")}`];
    },
    async edge(e, at) {
      const [source, target, twist] = await tables("edges/source", "edges/target", "edges/twist");
      const name = (p) => (p[2 * at] < 0 ? `node ${p[2 * at + 1]}` : `vertex ${p[2 * at]}`);
      return [e < INNER.edge ? "internal" : "external", `${name(source)} to ${name(target)}${twist[at] ? ", twisted" : ""}`];
    },
    async face(f, at) {
      const n = (await table("faces/vertex_count"))[at];
      return [f < INNER.face ? "internal" : "external", `${n} ${n === 1 ? "vertex" : "vertices"}`];
    },
    async node(n, at) {
      const [sign, vertex, slot] = await tables("nodes/orientation", "nodes/vertex", "nodes/slot");
      return [signed(sign[at]), `vertex ${vertex[at]}, slot ${slot[at]}`];
    },
    async link(l, at) {
      const [source, target] = await tables("links/source", "links/target");
      return ["", `node ${source[at]} to node ${target[at]}`];
    },
  };

  let drawn = 0;
  async function list() {
    const mine = ++drawn;
    const held = meta.held[state.kind], last = Math.max(0, Math.ceil(held / PAGE) - 1);
    state.page = Math.min(Math.max(0, state.page), last);
    const rows = [];
    for (let at = state.page * PAGE; at < Math.min(held, (state.page + 1) * PAGE); at++) {
      const number = await numberAt(state.kind, at);
      const texts = await brief[state.kind](number, at);
      rows.push(make("tr", [make("th", link(state.kind, number), { scope: "row" }), ...texts.map((x) => make("td", x))]));
    }
    if (mine !== drawn) return;
    const sample = meta.whole ? "" : ` in this sample, of ${TOTAL[state.kind]}`;
    const caption = make("caption", `${held} ${MANY[state.kind]}${sample}; page ${state.page + 1} of ${last + 1}`);
    byId("rows").replaceChildren(make("table", [caption, make("tbody", rows)]));
    for (const button of byId("kinds").children) {
      button.setAttribute("aria-pressed", String(button.dataset.kind === state.kind));
    }
    for (const button of byId("pager").children) {
      button.disabled = button.dataset.to === "back" ? state.page === 0 : state.page === last;
    }
  }

  function controls() {
    for (const kind of KINDS) {
      if (!TOTAL[kind]) continue;
      const button = make("button", MANY[kind], { type: "button", "data-kind": kind, "aria-pressed": "false" });
      button.addEventListener("click", () => { state.kind = kind; state.page = 0; list(); });
      byId("kinds").append(button);
    }
    for (const [name, to, step] of [["earlier", "back", -1], ["later", "on", 1]]) {
      const button = make("button", name, { type: "button", "data-to": to });
      button.addEventListener("click", () => { state.page += step; list(); });
      byId("pager").append(button);
    }
  }

  // -- finding -----------------------------------------------------------------------------------

  async function search(text) {
    const words = text.split(/[\s,]+/).filter((x) => x);
    const out = [];
    const cell = /^(vertex|edge|face|node|link)\s*(\d+)$/.exec(text.trim().toLowerCase());
    if (cell) {
      const number = Number(cell[2]);
      if (number < TOTAL[cell[1]]) {
        location.hash = `#${cell[1]}-${number}`;
        out.push(make("p", [link(cell[1], number)]));
      } else {
        out.push(make("p", TOTAL[cell[1]]
          ? `There is no ${cell[1]} ${number}; numbers run from 0 to ${TOTAL[cell[1]] - 1}.`
          : `There are no ${MANY[cell[1]]}.`));
      }
    }
    if (meta.labels === null) {
      if (!cell) out.push(make("p", "These cells have no labels: give a kind and a number, such as edge 3."));
    } else if (words.length && (!cell || words.every((x) => meta.labels.includes(x)))) {
      out.push(...(await byLabels(words)));
    }
    return out;
  }

  // cells whose corners are these labels, and vertices that have all of them among theirs
  async function byLabels(words) {
    const wanted = [];
    for (const word of words) {
      const k = meta.labels.indexOf(word);
      if (k < 0) return [make("p", `No corner has the label ${word}.`)];
      if (!wanted.includes(k)) wanted.push(k);
    }
    const [corners, edge, face] = await tables("vertices/corners", "vertices/edge", "wedges/face");
    const n = meta.held.vertex, homes = [];
    let count = 0;
    for (let at = 0; at < n; at++) {
      let met = 0;
      for (let c = 0; c < K; c++) if (wanted.includes(corners[at * K + c])) met++;
      if (met === wanted.length) {
        count++;
        if (homes.length < HITS) homes.push(at);
      }
    }
    const cells = new Map();
    const add = (kind, number) => cells.set(`${kind} ${number}`, [kind, number]);
    for (const at of homes) {
      const free = [];
      for (let c = 0; c < K; c++) if (!wanted.includes(corners[at * K + c])) free.push(c);
      if (free.length === 1) {
        const e = edge[at * K + free[0]];
        add("edge", e);
        if (e >= INNER.edge) add("node", e - INNER.edge);
      }
      if (free.length === 2) {
        const w = meta.pairs.findIndex(([i, j]) => i === free[0] && j === free[1]);
        const f = face[at * W + w];
        add("face", f);
        if (f >= INNER.face) add("link", f - INNER.face);
      }
    }
    for (const at of homes) add("vertex", await numberAt("vertex", at));
    const more = count > homes.length ? ` Only the first ${homes.length} of ${count} vertices are listed.` : "";
    if (!cells.size) return [make("p", "No simplex has all these labels.")];
    const items = [...cells.values()].map(([kind, number]) => make("li", link(kind, number)));
    const found = `${cells.size} ${cells.size === 1 ? "cell" : "cells"}, exact ones first; ` +
      `${count} ${count === 1 ? "vertex has" : "vertices have"} all these labels.${more}`;
    return [make("p", found), make("ul", items)];
  }

  // -- the page ----------------------------------------------------------------------------------

  function follow(focus) {
    const cell = /^#(vertex|edge|face|node|link)-(\d+)$/.exec(location.hash);
    if (cell) open(cell[1], Number(cell[2]), focus).catch(trouble);
  }

  function trouble(error) {
    byId("cell-body").replaceChildren(make("p", `The tables of this page cannot be unpacked: ${error.message}`));
  }

  byId("browser").hidden = false;
  byId("to-browser").hidden = false;
  if (typeof DecompressionStream === "undefined") {
    trouble(new Error("this browser is too old to unpack them"));
    return;
  }
  controls();
  list().catch(trouble);
  byId("find").addEventListener("submit", (event) => {
    event.preventDefault();
    search(byId("query").value).then((out) => byId("found").replaceChildren(...out)).catch(trouble);
  });
  addEventListener("hashchange", () => follow(true));
  follow(true);
})();
