// Reads the data, draws every part, and says on the page when all is drawn.

function colourSwatches() {
  for (const mark of document.querySelectorAll(".swatch[data-variant]")) {
    const code = state.names.indexOf(mark.dataset.variant), other = mark.closest("tr").classList.contains("other");
    mark.className = `swatch ${hue(other ? -1 : code)}${dash(other ? -1 : code)}`;
  }
}

function currentPart() {
  const links = new Map([...document.querySelectorAll("nav a")].map((link) => [link.getAttribute("href").slice(1), link]));
  const seen = new IntersectionObserver((entries) => {
    for (const entry of entries) if (entry.isIntersecting) {
      for (const link of links.values()) link.removeAttribute("aria-current");
      links.get(entry.target.id).setAttribute("aria-current", "true");
    }
  }, { rootMargin: "-30% 0px -60% 0px" });
  for (const id of links.keys()) seen.observe(byId(id));
}

// On paper everything is open but what is there for machines.
function openForPaper() {
  let opened = [];
  addEventListener("beforeprint", () => {
    opened = [...document.querySelectorAll("details:not([open], .long)")];
    for (const one of opened) one.open = true;
  });
  addEventListener("afterprint", () => { for (const one of opened) one.open = false; });
}

async function start() {
  const data = JSON.parse(byId("data").textContent);
  state.names = data.curves.variants.map((one) => one.name);
  state.trades = await columns(data.trades.columns);
  state.count = data.trades.count;
  colourSwatches();
  drawInterval(data.evidence);
  await readCurves(data);
  drawCurves();
  drawCalendar();
  await drawSources(data);
  drawSpread();
  drawOutcomes();
  await drawDraws(data);
  await drawPremium(data);
  drawTiming(data);
  drawOdds(data);
  await drawAhead(data);
  drawLedger();
  await drawVolatility(data);
  await readPictures(data);
  currentPart();
  openForPaper();
  requestAnimationFrame(() => requestAnimationFrame(() => { performance.mark("drawn"); document.documentElement.dataset.drawn = "yes"; }));
}

start();
