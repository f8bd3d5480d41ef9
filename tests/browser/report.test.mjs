// Opens a report in headless Chromium with networking off and fails if anything is not as the report promises.
//
//   node report.test.mjs PAGE NODE_MODULES CHROMIUM OUTPUT_FOLDER
//
// Screenshots (wide, phone, dark, print, scripts off) go to the output folder. Exit code 77: skipped.
import { existsSync } from "node:fs";
import { createRequire } from "node:module";
import { basename, join, resolve } from "node:path";
import { pathToFileURL } from "node:url";

const [page, modules, chromium, output] = process.argv.slice(2);
if (!output) {
  console.error("report.test.mjs PAGE NODE_MODULES CHROMIUM OUTPUT_FOLDER");
  process.exit(2);
}
if (!existsSync(join(modules, "playwright-core"))) {
  console.log(`skipped: playwright-core is not in ${modules}`);
  process.exit(77);
}
const require = createRequire(join(resolve(modules), "x.js"));
const playwright = require("playwright-core");
const address = pathToFileURL(resolve(page)).href;
const stem = basename(page, ".html");

const faults = [];
const require_that = (holds, claim) => {
  console.log(`${holds ? "holds" : "FAILS"}: ${claim}`);
  if (!holds) faults.push(claim);
};

const browser = await playwright.chromium.launch({
  executablePath: chromium, headless: true,
  args: ["--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
         "--disable-component-update", "--disable-sync"],
});

/// A tab that opens the page alone, offline; every other request, even one that could not get out, is counted.
async function open(options, use) {
  const context = await browser.newContext({ viewport: { width: 1280, height: 900 }, ...options });
  await context.setOffline(true);
  const tried = [], complaints = [];
  const own = (asked) => asked === address || /^(blob|data):/.test(asked);  // the last two are made in the page itself
  context.on("request", (request) => { if (!own(request.url())) tried.push(request.url()); });
  context.setDefaultTimeout(120000);  // a busy machine is not a fault of the page
  const tab = await context.newPage();
  tab.on("pageerror", (error) => complaints.push(error.message));
  tab.on("console", (message) => {
    if (["error", "warning"].includes(message.type())) complaints.push(message.text());
  });
  await tab.goto(address);
  await use(tab);
  const where = options.name;
  require_that(tried.length === 0, `${where}: nothing is fetched (${tried.slice(0, 3).join(", ") || "no request"})`);
  require_that(complaints.length === 0, `${where}: nothing is complained about (${complaints.slice(0, 3).join(" | ") || "silent"})`);
  await context.close();
}

const shot = (tab, name) => tab.screenshot({ path: join(output, `${stem}-${name}.png`), fullPage: true });

/// Unfolds everything and waits until each chart is drawn or has failed.
async function drawn(tab) {
  const charts = await tab.locator("figure.chart").count();
  await tab.evaluate(() => document.querySelectorAll("details").forEach((fold) => { fold.open = true; }));
  await tab.waitForFunction((count) => document.querySelectorAll("figure.chart.drawn").length === count, charts,
                            { timeout: 120000 }).catch(() => {});
  await tab.waitForTimeout(300);
  return charts;
}

/// What does not fit the width of the window, other than inside boxes that scroll.
const overflow = (tab) => tab.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);

/// Per chart: are there pictures of the data in it, and do its labels keep clear of each other?
const look = (tab) => tab.evaluate(() => [...document.querySelectorAll("figure.chart")].map((figure) => {
  const screen = figure.querySelector(".screen");
  const boxes = [...screen.querySelectorAll(".annotation-text-g")].map((each) => each.getBoundingClientRect());
  const meet = (a, b) => a.left < b.right - 1 && b.left < a.right - 1 && a.top < b.bottom - 1 && b.top < a.bottom - 1;
  return {
    title: figure.querySelector("figcaption").textContent,
    plotly: screen.classList.contains("js-plotly-plot"),
    marks: screen.querySelectorAll(".scatterlayer .trace path, .barlayer path, .heatmaplayer image").length,
    paper: getComputedStyle(figure.querySelector(".paper")).display,
    width: screen.getBoundingClientRect().width,
    collisions: boxes.reduce((sum, a, i) => sum + boxes.slice(i + 1).filter((b) => meet(a, b)).length, 0),
  };
}));

await open({ name: "laptop" }, async (tab) => {
  const charts = await drawn(tab);
  const seen = await look(tab);
  require_that(charts > 0, "there are charts");
  require_that(seen.filter((each) => each.plotly).length === charts, `all ${charts} charts are drawn by the script`);
  for (const each of seen) {
    require_that(each.marks > 0 && each.width > 200, `"${each.title}" shows data (${each.marks} paths)`);
    require_that(each.paper === "none", `"${each.title}" is shown once`);
    require_that(each.collisions === 0, `"${each.title}": no label lies on another (${each.collisions})`);
  }
  require_that((await overflow(tab)) <= 0, "laptop: nothing sticks out of the window");
  await shot(tab, "laptop");

  const box = await tab.locator("figure.chart .screen .nsewdrag").first().boundingBox();
  await tab.locator("figure.chart").first().scrollIntoViewIfNeeded();
  await tab.locator("figure.chart .screen .nsewdrag").first().hover({ position: { x: box.width / 3, y: box.height / 2 } });
  await tab.waitForSelector(".hoverlayer .hovertext, .hoverlayer .legend", { timeout: 5000 }).catch(() => {});
  const read_out = await tab.locator(".hoverlayer").first().textContent();
  require_that(/\d/.test(read_out), `the cursor reads out values ("${read_out}")`);

  const [saved] = await Promise.all([
    tab.waitForEvent("download").catch(() => null),
    tab.locator("figure.chart .modebar-btn").first().click(),
  ]);
  require_that(saved?.suggestedFilename().endsWith(".png"), `a chart can be saved as a picture (${saved?.suggestedFilename()})`);

  await tab.emulateMedia({ media: "print" });
  const on_paper = await tab.evaluate(() => [...document.querySelectorAll("figure.chart")].every((figure) =>
    getComputedStyle(figure.querySelector(".screen")).display === "none" &&
    figure.querySelector(".paper svg").getBoundingClientRect().height > 50));
  require_that(on_paper, "print shows the SVG of every chart, and no other");
  await tab.pdf({ path: join(output, `${stem}.pdf`), preferCSSPageSize: true, printBackground: true });
  await shot(tab, "print");
});

await open({ name: "phone", viewport: { width: 390, height: 844 }, hasTouch: true, isMobile: true }, async (tab) => {
  await drawn(tab);
  require_that((await overflow(tab)) <= 0, `phone: nothing sticks out of the window (${await overflow(tab)} px)`);
  for (const each of await look(tab)) require_that(each.plotly && each.width > 200, `phone: "${each.title}" is drawn`);
  await shot(tab, "phone");
});

await open({ name: "dark", colorScheme: "dark" }, async (tab) => {
  await drawn(tab);
  await shot(tab, "dark");
});

await open({ name: "scripts off", javaScriptEnabled: false }, async (tab) => {
  const charts = await tab.locator("figure.chart").count();
  let visible = 0;
  for (const svg of await tab.locator("figure.chart .paper > svg").all()) visible += (await svg.isVisible()) ? 1 : 0;
  require_that(visible === charts, `scripts off: the SVG of each of ${charts} charts is visible`);
  await shot(tab, "scripts-off");
});

await browser.close();
if (faults.length > 0) {
  console.error(`${faults.length} claim(s) fail`);
  process.exit(1);
}
