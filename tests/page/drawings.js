// Looks at the drawings of a report page as they stand; texts that say what is wrong, an empty list is good.
(() => {
  const faults = [];
  const shown = (element) => element.checkVisibility() && element.getClientRects().length > 0;
  // The ink of a line of text: its box without the room above capitals and below the base line.
  const ink = (text) => {
    const box = text.getBoundingClientRect();
    return { left: box.left, right: box.right, top: box.top + 0.22 * box.height, bottom: box.bottom - 0.22 * box.height };
  };
  const meet = (a, b) => Math.min(a.right, b.right) - Math.max(a.left, b.left) > 0.5 && Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top) > 0.5;
  for (const drawing of [...document.querySelectorAll("svg")].filter(shown)) {
    const name = drawing.getAttribute("aria-label") ?? drawing.getAttribute("class") ?? "drawing";
    const frame = drawing.getBoundingClientRect();
    if (drawing.querySelector("text") && !(drawing.getAttribute("role") === "img" && drawing.getAttribute("aria-label"))) faults.push(`no name: ${name}`);
    const texts = [...drawing.querySelectorAll("text")].filter(shown).map((text) => ({ words: text.textContent, box: ink(text), size: parseFloat(getComputedStyle(text).fontSize) * drawing.getScreenCTM().a }));
    for (const { words, box, size } of texts) {
      if (box.left < frame.left - 0.5 || box.right > frame.right + 0.5 || box.top < frame.top - 0.5 || box.bottom > frame.bottom + 0.5) faults.push(`${name}: "${words}" is cut`);
      if (size < LEAST_SIZE) faults.push(`${name}: "${words}" is ${size.toFixed(1)} pixels high`);
    }
    for (let k = 0; k < texts.length; k += 1) {
      for (let j = 0; j < k; j += 1) if (meet(texts[j].box, texts[k].box)) faults.push(`${name}: "${texts[j].words}" on "${texts[k].words}"`);
    }
    for (const bar of [...drawing.querySelectorAll("rect.c-bar, .v-bar path")].filter(shown)) {
      const box = bar.getBoundingClientRect();
      for (const text of texts) if (meet(box, text.box)) faults.push(`${name}: "${text.words}" on its bar`);
    }
  }
  for (const box of document.querySelectorAll("*")) {
    if (box.scrollWidth <= box.clientWidth + 1 || !["auto", "scroll"].includes(getComputedStyle(box).overflowX)) continue;
    const what = `<${box.tagName.toLowerCase()} class="${box.className}"> "${box.textContent.trim().slice(0, 30)}"`;
    if (box.querySelector("svg")) faults.push(`a drawing is wider than the window: ${what}`);
    if (box.tabIndex < 0) faults.push(`keys do not reach what scrolls: ${what}`);
  }
  return [...new Set(faults)];
})()
