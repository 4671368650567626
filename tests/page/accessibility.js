// Looks at the page as it stands and lists what bars somebody's way. Returns texts; an empty list is good.
// Limits: Web Content Accessibility Guidelines 2.2 (W3C, 2023): contrast 1.4.3 and 1.4.11, target size 2.5.8, headings
// and labels 1.3.1 and 2.4.6, reflow 1.4.10. Relative luminance and contrast ratio as defined there.
(() => {
  const faults = [];
  const seen = (element) => element.checkVisibility({ opacityProperty: true, visibilityProperty: true, contentVisibilityAuto: true })
    && element.getClientRects().length > 0;
  const unseen = (element) => element.closest(".unseen, .skip") !== null;
  const short = (element) => `<${element.tagName.toLowerCase()} ${element.id ? `#${element.id}` : ""} class="${element.getAttribute("class") ?? ""}"> "${(element.textContent ?? "").trim().slice(0, 40)}"`;
  const dialog = document.querySelector("dialog[open]");
  const all = [...(dialog ?? document).querySelectorAll("*")].filter(seen);

  const parse = (text) => {
    const numbers = text.match(/[\d.]+/g)?.map(Number) ?? [0, 0, 0, 0];
    if (text.startsWith("color(srgb")) return { r: 255 * numbers[0], g: 255 * numbers[1], b: 255 * numbers[2], a: numbers[3] ?? 1 };
    return { r: numbers[0], g: numbers[1], b: numbers[2], a: numbers[3] ?? 1 };
  };
  const over = (top, below) => ({ r: top.r * top.a + below.r * (1 - top.a), g: top.g * top.a + below.g * (1 - top.a), b: top.b * top.a + below.b * (1 - top.a), a: 1 });
  const luminance = ({ r, g, b }) => {
    const [x, y, z] = [r, g, b].map((c) => (c / 255 <= 0.04045 ? c / 255 / 12.92 : ((c / 255 + 0.055) / 1.055) ** 2.4));
    return 0.2126 * x + 0.7152 * y + 0.0722 * z;
  };
  const contrast = (a, b) => {
    const [high, low] = [luminance(a), luminance(b)].sort((x, y) => y - x);
    return (high + 0.05) / (low + 0.05);
  };
  const ground = (element) => {
    const layers = [];
    for (let one = element; one; one = one.parentElement) {
      const colour = parse(getComputedStyle(one).backgroundColor);
      if (colour.a > 0) layers.push(colour);
      if (colour.a === 1) break;
    }
    return layers.reverse().reduce((below, top) => over(top, below), { r: 255, g: 255, b: 255, a: 1 });
  };
  const strength = (element) => {
    let strength_of = 1;
    for (let one = element; one; one = one.parentElement) strength_of *= Number(getComputedStyle(one).opacity);
    return strength_of;
  };

  // Text against its ground.
  for (const element of all) {
    const own = [...element.childNodes].some((node) => node.nodeType === Node.TEXT_NODE && node.textContent.trim());
    if (!own || unseen(element) || element.closest("[aria-hidden=true]:not(.plot)") || element.matches(":disabled, option")) continue;
    const style = getComputedStyle(element);
    const below = ground(element);
    const colour = parse(element.namespaceURI.includes("svg") ? style.fill : style.color);
    const size = parseFloat(style.fontSize), large = size >= 24 || (size >= 18.66 && Number(style.fontWeight) >= 700);
    const ratio = contrast(over({ ...colour, a: colour.a * strength(element) }, below), below);
    if (ratio < (large ? 3 : 4.5)) faults.push(`contrast ${ratio.toFixed(2)}: ${short(element)}`);
  }

  // Borders by which a control is known.
  for (const element of all.filter((one) => one.matches("input[type=text], input[type=search], input[type=password], select, textarea, button:not(.file)"))) {
    if (unseen(element)) continue;
    const style = getComputedStyle(element), outside = ground(element.parentElement);
    const best = Math.max(contrast(parse(style.borderTopColor), outside), contrast(ground(element), outside));
    if (!element.disabled && best < 3) faults.push(`edge ${best.toFixed(2)}: ${short(element)}`);
  }

  // Targets: 24 by 24, unless in a line of text.
  for (const element of all.filter((one) => one.matches("a[href], button, input, select, textarea, summary"))) {
    if (unseen(element) || (element.matches("a") && getComputedStyle(element).display === "inline")) continue;
    const box = element.getBoundingClientRect();
    if (box.width < 24 || box.height < 24) faults.push(`target ${box.width.toFixed(0)} x ${box.height.toFixed(0)}: ${short(element)}`);
  }

  // Headings, in their order.
  const headings = all.filter((one) => /^H[1-6]$/.test(one.tagName));
  const ones = headings.filter((one) => one.tagName === "H1");
  if (!dialog && ones.length !== 1) faults.push(`${ones.length} headings of the first level`);
  for (let k = 1; k < headings.length; k += 1) {
    if (Number(headings[k].tagName[1]) > Number(headings[k - 1].tagName[1]) + 1) faults.push(`a level is skipped before ${short(headings[k])}`);
  }

  // Fields have labels, tables captions and heads, groups names, ids are used once.
  for (const element of all.filter((one) => one.matches("input, select, textarea"))) {
    if (!unseen(element) && !(element.labels?.length || element.getAttribute("aria-label"))) faults.push(`no label: ${short(element)}`);
  }
  for (const element of all.filter((one) => one.matches("table"))) {
    if (!(element.caption?.textContent || element.getAttribute("aria-label")) || !element.querySelector("th[scope]")) faults.push(`no caption or heads: ${short(element)}`);
  }
  for (const element of all.filter((one) => one.matches("fieldset"))) if (!element.querySelector("legend")?.textContent) faults.push("fieldset without legend");
  for (const element of document.querySelectorAll("img")) if (element.getAttribute("alt") === null) faults.push("picture without alt");
  const ids = [...document.querySelectorAll("[id]")].map((one) => one.id);
  for (const id of new Set(ids)) if (ids.filter((one) => one === id).length > 1) faults.push(`id used twice: ${id}`);
  for (const element of document.querySelectorAll("[aria-describedby], [aria-labelledby], label[for]")) {
    for (const name of ["aria-describedby", "aria-labelledby", "for"]) {
      for (const id of (element.getAttribute(name) ?? "").split(" ").filter(Boolean)) if (!document.getElementById(id)) faults.push(`${name} points at nothing: ${id}`);
    }
  }
  if (document.documentElement.lang !== "en") faults.push("no language");
  if (!document.querySelector("[aria-live=polite]")) faults.push("no live region");
  if (!document.title) faults.push("no title");

  // Reflow: nothing is wider than the window but what scrolls by itself.
  const page = document.scrollingElement;
  if (page.scrollWidth > page.clientWidth + 1) {
    const wide = all.filter((one) => one.getBoundingClientRect().right > page.clientWidth + 1 && !one.closest(".scroll, svg")).slice(0, 4);
    faults.push(`${page.scrollWidth} pixels in a window of ${page.clientWidth}: ${wide.map(short).join(", ")}`);
  }
  return [...new Set(faults)];
})()
