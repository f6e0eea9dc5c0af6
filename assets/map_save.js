/* Saves the map as seen, with a legend, as a PNG that says 300 dots per inch. */
(() => {
  "use strict";
  const PRINT_DOTS_PER_METRE = 11811; // 300 dpi
  const LEAST_WIDTH = 2126;           // 18 cm at 300 dpi: the width of a page of print
  const COLUMNS = 4;

  /** Entries of the legend: modules that are drawn in a colour, largest first. */
  function entries(colouring) {
    if (!colouring) return [];
    return colouring.hues
      .map((hue, module) => ({ hue, text: colouring.numbers[module] || `M${module + 1}`, grey: colouring.grey?.[module] }))
      .filter((entry) => !entry.grey)
      .slice(0, 40);
  }

  async function withLegend(blob, colouring) {
    const picture = await createImageBitmap(blob);
    const scale = Math.max(1, LEAST_WIDTH / picture.width);
    const width = Math.round(picture.width * scale);
    const line = Math.round(width / 44);
    const listed = entries(colouring);
    const rows = Math.ceil(listed.length / COLUMNS) + 1;
    const canvas = document.createElement("canvas");
    canvas.width = width;
    canvas.height = Math.round(picture.height * scale) + line * (rows + 1);
    const context = canvas.getContext("2d");
    const style = getComputedStyle(document.documentElement);
    context.fillStyle = style.getPropertyValue("--paper") || "#fbfaf6";
    context.fillRect(0, 0, canvas.width, canvas.height);
    context.imageSmoothingQuality = "high";
    const top = Math.round(picture.height * scale);
    context.drawImage(picture, 0, 0, width, top);
    picture.close();
    context.font = `${Math.round(line * 0.62)}px ${getComputedStyle(document.body).fontFamily}`;
    context.textBaseline = "middle";
    const byConfidence = /surely/.test(document.getElementById("legend-text")?.textContent || "");
    listed.forEach((entry, place) => {
      const x = line + (place % COLUMNS) * ((width - 2 * line) / COLUMNS);
      const y = top + line * (0.6 + Math.floor(place / COLUMNS));
      if (!byConfidence) {
        context.fillStyle = entry.hue;
        context.fillRect(x, y - line * 0.26, line * 0.52, line * 0.52);
      }
      context.fillStyle = style.getPropertyValue("--ink") || "#1d2a2f";
      context.fillText(entry.text, x + line * 0.8, y, (width - 2 * line) / COLUMNS - line);
    });
    const cut = document.getElementById("size-cut")?.value || "5";
    const words = `${document.getElementById("legend-text")?.textContent || ""}${cut} genes`;
    context.fillStyle = style.getPropertyValue("--ink") || "#1d2a2f";
    context.fillText(words, line, top + line * (rows - 0.4));
    return new Promise((resolve, reject) => {
      canvas.toBlob((made) => (made ? resolve(made) : reject(new Error("the picture could not be made"))), "image/png");
    });
  }

  /** CRC-32 as PNG wants it (ISO/IEC 15948, 5.5). */
  function crc(bytes) {
    let value = 0xffffffff;
    for (const byte of bytes) {
      value ^= byte;
      for (let bit = 0; bit < 8; bit += 1) value = value & 1 ? (value >>> 1) ^ 0xedb88320 : value >>> 1;
    }
    return (value ^ 0xffffffff) >>> 0;
  }

  /** Puts the chunk of physical size behind the head of the file (ISO/IEC 15948, 11.3.4.3). */
  async function at300(blob) {
    const bytes = new Uint8Array(await blob.arrayBuffer());
    const chunk = new DataView(new ArrayBuffer(21));
    chunk.setUint32(0, 9);
    [0x70, 0x48, 0x59, 0x73].forEach((letter, place) => chunk.setUint8(4 + place, letter)); // pHYs
    chunk.setUint32(8, PRINT_DOTS_PER_METRE);
    chunk.setUint32(12, PRINT_DOTS_PER_METRE);
    chunk.setUint8(16, 1);
    chunk.setUint32(17, crc(new Uint8Array(chunk.buffer, 4, 13)));
    const head = 33; // signature 8, IHDR 25
    return new Blob([bytes.subarray(0, head), chunk.buffer, bytes.subarray(head)], { type: "image/png" });
  }

  async function save() {
    const { map } = window.corymb;
    const size = Math.max(2, Math.min(4, LEAST_WIDTH / Math.max(1, document.getElementById("map").clientWidth)));
    const blob = await at300(await withLegend(await map.png(size), map.colouring()));
    const anchor = document.createElement("a");
    anchor.href = URL.createObjectURL(blob);
    anchor.download = "map.png";
    document.body.append(anchor);
    anchor.click();
    anchor.remove();
    setTimeout(() => URL.revokeObjectURL(anchor.href), 60000);
  }

  document.addEventListener("click", (event) => {
    if (!event.target.closest?.("#save-map")) return;
    save().catch((error) => window.dash_clientside.set_props("fault", { data: `The map could not be saved (${error.message}).` }));
  });
})();
