// Rules that a page must keep so that everybody can use it; returns the faults as sentences.
// After the Web Content Accessibility Guidelines 2.2: 1.1.1, 1.3.1, 1.4.3, 2.4.6, 3.1.1, 4.1.2.
() => {
  const faults = [];
  const seen = (node) => node.checkVisibility({ checkOpacity: true, checkVisibilityCSS: true });
  const told = (node) => `<${node.tagName.toLowerCase()} id="${node.id}" class="${node.getAttribute("class") || ""}">`;
  const nameOf = (node) => {
    const by = node.getAttribute("aria-labelledby");
    if (by) return by.split(" ").map((id) => document.getElementById(id)?.textContent || "").join(" ").trim();
    return (node.getAttribute("aria-label") || (node.labels && [...node.labels].map((one) => one.textContent).join(" ")) || node.textContent || "").trim();
  };
  if (!document.documentElement.lang) faults.push("the page says no language");
  if (!document.title) faults.push("the page has no title");
  const ids = [...document.querySelectorAll("[id]")].map((node) => node.id);
  for (const id of new Set(ids.filter((one, at) => ids.indexOf(one) !== at))) faults.push(`the id ${id} stands twice`);
  if (document.querySelectorAll("main").length !== 1 || document.querySelectorAll("h1").length !== 1) faults.push("not one main part and one title");
  let level = 0;
  for (const heading of document.querySelectorAll("h1, h2, h3, h4")) {
    if (!seen(heading)) continue;
    const now = Number(heading.tagName[1]);
    if (now > level + 1) faults.push(`the heading "${heading.textContent}" skips a level`);
    level = now;
  }
  for (const node of document.querySelectorAll("a[href], button, input, select, summary, [tabindex], [role=img], [role=grid], dialog[open]"))
    if (seen(node) && !nameOf(node)) faults.push(`${told(node)} has no name`);
  for (const svg of document.querySelectorAll("svg")) if (!svg.getAttribute("role")) faults.push(`${told(svg)} has no role`);
  for (const row of document.querySelectorAll("[role=row]")) if (!row.closest("[role=grid]")) faults.push("a row outside a grid");
  for (const cell of document.querySelectorAll("[role=gridcell], [role=columnheader]")) if (!cell.closest("[role=row]")) faults.push("a cell outside a row");
  for (const head of document.querySelectorAll("th")) if (!head.getAttribute("scope")) faults.push(`${told(head)} "${head.textContent}" has no scope`);
  for (const node of document.querySelectorAll("[aria-labelledby], [aria-activedescendant]"))
    for (const id of (node.getAttribute("aria-labelledby") || node.getAttribute("aria-activedescendant")).split(" "))
      if (!document.getElementById(id)) faults.push(`${told(node)} points at ${id}, which is not there`);

  const parse = (colour) => (colour.match(/[\d.]+/g) || [0, 0, 0, 0]).map(Number);
  const over = (top, under) => { const a = top[3] ?? 1; return [0, 1, 2].map((at) => top[at] * a + under[at] * (1 - a)); };
  const behind = (node) => {
    const layers = [];
    for (let at = node; at; at = at.parentElement) layers.push(parse(getComputedStyle(at).backgroundColor));
    return layers.reverse().reduce((under, top) => over(top, under), [255, 255, 255]);
  };
  const light = (rgb) => {
    const [r, g, b] = rgb.map((one) => { const c = one / 255; return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4; });
    return 0.2126 * r + 0.7152 * g + 0.0722 * b;
  };
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT), low = new Set();
  while (walker.nextNode()) {
    const node = walker.currentNode.parentElement;
    if (!walker.currentNode.textContent.trim() || !seen(node) || node.closest("script, style, noscript, title")) continue;
    const style = getComputedStyle(node), ink = parse(node.closest("svg") ? style.fill : style.color), paper = behind(node);
    const [one, other] = [light(over(ink, paper)), light(paper)].sort((a, b) => b - a);
    const ratio = (one + 0.05) / (other + 0.05), size = parseFloat(style.fontSize);
    const wanted = size >= 24 || (size >= 18.66 && Number(style.fontWeight) >= 700) ? 3 : 4.5;
    if (ratio < wanted) low.add(`${told(node)} "${walker.currentNode.textContent.trim().slice(0, 30)}" has contrast ${ratio.toFixed(2)}, ${wanted} is wanted`);
  }
  return [...faults, ...low];
}
