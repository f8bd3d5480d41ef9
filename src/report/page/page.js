// Draws the charts of the report, one after the other, from the data beside each; folds what is to be folded.
"use strict";
(() => {
  const dark = matchMedia("(prefers-color-scheme: dark)");
  const touch = matchMedia("(pointer: coarse)");
  const labelSize = 12, rowHeight = 15, poleGap = 3, labelGap = 6;
  const barHeight = touch.matches ? 30 : 0;  // buttons that do not wait for a pointer to come near
  const pen = document.createElement("canvas").getContext("2d");

  const property = (role) => getComputedStyle(document.documentElement).getPropertyValue("--" + role).trim();

  // "role:NAME" or "role:NAME/OPACITY" -> the colour of the scheme in use.
  function colour(text) {
    const [role, opacity] = text.slice(5).split("/");
    const hex = property(role);
    if (opacity === undefined) return hex;
    const part = (at) => parseInt(hex.slice(at, at + 2), 16);
    return `rgba(${part(1)},${part(3)},${part(5)},${opacity})`;
  }

  // A copy with every colour in place; long rows of numbers are shared, not copied.
  function coloured(value) {
    if (typeof value === "string") return value.startsWith("role:") ? colour(value) : value;
    if (Array.isArray(value)) return typeof value.at(-1) === "number" ? value : value.map(coloured);
    if (value === null || typeof value !== "object") return value;
    return Object.fromEntries(Object.entries(value).map(([key, part]) => [key, coloured(part)]));
  }

  // The colours of these maps follow the logarithm; the cursor shows the value itself.
  function takeLogarithms(chart) {
    for (const number of chart.meta.logMaps) {
      const trace = chart.data[number];
      trace.customdata = trace.z;
      trace.z = trace.z.map((row) => row.map((value) => (value > 0 ? Math.log10(value) : trace.zmin)));
    }
  }

  const span = (flag) => {
    const width = flag.width + poleGap + labelGap;
    return flag.toLeft ? [flag.place - width, flag.place] : [flag.place, flag.place + width];
  };
  const within = (x, [from, to]) => from < x && x < to;
  const textsMeet = (a, b) => a.row === b.row && span(a)[0] < span(b)[1] && span(b)[0] < span(a)[1];
  const polesCross = (a, b) => (a.row >= b.row && within(a.place, span(b))) || (b.row >= a.row && within(b.place, span(a)));

  // Labels of vertical marks stand in rows over the panel; how many rows depends on the width in use.
  function placedFlags(screen, meta) {
    const axis = screen._fullLayout.xaxis;
    const [from, to] = axis.range;
    pen.font = `${labelSize}px ${screen._fullLayout.font.family}`;
    const flags = meta.flags.map(({at, text}) => {
      const x = meta.logX ? Math.log10(at) : at;
      const place = (x - from) / (to - from) * axis._length, width = pen.measureText(text).width;
      return {x, text, place, width, row: 0, toLeft: place + width + poleGap > axis._length && place > axis._length / 2};
    }).filter(({place}) => place >= -1 && place <= axis._length + 1).sort((a, b) => a.place - b.place);
    // Each must stand above what it reaches over: to the right from the right, then to the left from the left.
    const placed = [];
    for (const flag of [...flags.filter((each) => !each.toLeft).reverse(), ...flags.filter((each) => each.toLeft)]) {
      const free = (test) => {
        for (flag.row = 0; flag.row <= flags.length; flag.row++) {
          if (!placed.some((other) => test(flag, other))) return true;
        }
        return false;
      };
      if (!free((a, b) => textsMeet(a, b) || polesCross(a, b))) free(textsMeet);
      placed.push(flag);
    }
    return flags;
  }

  const annotationOf = (flag) => ({
    x: flag.x, y: 1, xref: "x", yref: "paper", text: flag.text, showarrow: true, arrowhead: 0, arrowwidth: 1,
    arrowcolor: property("frame"), ax: 0, ay: -(flag.row * rowHeight + 3), xanchor: flag.toLeft ? "right" : "left",
    yanchor: "bottom", font: {size: labelSize, color: property("ink")}, borderpad: 0,
  });

  // Room above the panels for legend and labels. Runs after every drawing, changes something only where it must.
  function settle(screen) {
    const {meta, notes} = screen.chart;
    const flags = placedFlags(screen, meta);
    const legend = screen.querySelector(".legend")?.getBBox().height ?? 0;
    const rows = flags.reduce((most, flag) => Math.max(most, flag.row + 1), 0);
    const top = Math.ceil(10 + barHeight + legend + (rows > 0 ? rows * rowHeight + 6 : 0));
    const state = JSON.stringify([top, flags.map(({x, row, toLeft}) => [x, row, toLeft])]);
    if (state === screen.chart.state) return;
    screen.chart.state = state;
    screen.style.height = meta.height + top + "px";
    Plotly.relayout(screen, {
      "margin.t": top, height: meta.height + top, "legend.y": 1 - barHeight / (meta.height + top),
      annotations: [...notes, ...flags.map(annotationOf)],
    });
  }

  async function draw(figure) {
    const screen = figure.querySelector(".screen");
    const chart = JSON.parse(figure.querySelector("script").textContent);
    takeLogarithms(chart);
    const {data, layout} = coloured({data: chart.data, layout: chart.layout});
    // A finger must be able to move the page; the buttons above the chart still zoom.
    if (touch.matches) layout.dragmode = false;
    layout.height = chart.meta.height;
    screen.chart = {meta: chart.meta, notes: layout.annotations, state: ""};
    screen.style.height = chart.meta.height + "px";
    figure.classList.add("drawing-now");
    await Plotly.newPlot(screen, data, layout, chart.config);
    figure.classList.add("drawn");
    figure.classList.remove("drawing-now");
    screen.on("plotly_afterplot", () => settle(screen));
    settle(screen);
  }

  async function drawAll(figures) {
    for (const figure of figures) {
      try {
        await draw(figure);
      } catch (fault) {  // the SVG stays
        figure.classList.remove("drawing-now", "drawn");
        console.error(fault);
      }
      await new Promise((next) => setTimeout(next));
    }
  }

  // A folded chart has no width: it is drawn when it is first unfolded, and fitted when it is unfolded again.
  const charts = [...document.querySelectorAll("figure.chart")];
  const inSight = (figure) => !figure.closest("details:not([open])");
  const folds = [...document.querySelectorAll("details")];
  function unfolded(fold) {
    const inside = charts.filter((figure) => fold.contains(figure) && inSight(figure));
    for (const figure of inside.filter((each) => each.classList.contains("drawn"))) {
      Plotly.Plots.resize(figure.querySelector(".screen"));
    }
    drawAll(inside.filter((figure) => !figure.classList.contains("drawn")));
  }

  let opened = [];
  addEventListener("beforeprint", () => {
    opened = folds.filter((fold) => !fold.open);
    for (const fold of opened) fold.open = true;
  });
  addEventListener("afterprint", () => { for (const fold of opened) fold.open = false; });

  for (const fold of folds) {
    fold.open = false;
    fold.addEventListener("toggle", () => { if (fold.open && window.Plotly) unfolded(fold); });
  }
  if (window.Plotly) {
    drawAll(charts.filter(inSight)).then(() => { document.documentElement.dataset.charts = "drawn"; });
    dark.addEventListener("change", () => drawAll(charts.filter((figure) => figure.classList.contains("drawn"))));
  }
})();
