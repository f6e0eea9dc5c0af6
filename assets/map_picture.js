/* The map as a picture file: all layers drawn again larger than on the screen, on paper. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const SIZE = 2;

  /**
   * @param {object} layers
   * @param {object} scene
   * @param {number} size how many times the size of the screen
   * @returns {Promise<Blob>} PNG of the view as seen
   */
  async function png(layers, scene, size = SIZE) {
    layers.flush();
    const view = layers.viewNow(size);
    const { theme } = layers;
    const canvas = document.createElement("canvas");
    const context = parts.view.prepare(canvas, view);
    context.fillStyle = parts.colours.text(theme.paper);
    context.fillRect(0, 0, canvas.width, canvas.height);
    if (scene.network) {
      if (scene.network.m > 0) {
        const { bitmap } = await layers.edges.make(view, theme);
        context.drawImage(bitmap, 0, 0);
        bitmap.close();
      }
      if (scene.field) parts.shading.draw(context, scene.field, view);
      const over = document.createElement("canvas");
      const overContext = parts.view.prepare(over, view);
      parts.nodes.draw(overContext, scene.network, scene.lookOf(theme), view, theme);
      context.drawImage(over, 0, 0);
      parts.labels.draw(context, scene, view, theme);
    }
    return new Promise((resolve, reject) => {
      canvas.toBlob((blob) => (blob ? resolve(blob) : reject(new Error("the picture could not be made"))), "image/png");
    });
  }

  parts.picture = { png };
})();
