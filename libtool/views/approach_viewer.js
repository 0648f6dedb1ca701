// One 3Dmol.js viewer; the kernel swaps the scene.

function render({ model, el }) {
  const frame = document.createElement("div");
  frame.className = "libtool-approach";
  frame.style.cssText = `position:relative;width:100%;height:${model.get("height")}px;border:1px solid var(--jp-border-color2,#c8c8c8);background:#fff`;
  frame.setAttribute("role", "img");
  const words = document.createElement("p");
  words.style.cssText = "margin:4px 0;font-size:13px;color:var(--jp-ui-font-color1,#222)";
  words.setAttribute("aria-live", "polite");
  const legend = document.createElement("ul");
  legend.style.cssText = "list-style:none;display:flex;flex-wrap:wrap;gap:2px 14px;margin:2px 0;padding:0;font-size:12px;color:var(--jp-ui-font-color2,#555)";
  for (const [colour, meaning] of model.get("_legend")) {
    const item = document.createElement("li");
    const dot = document.createElement("span");
    dot.style.cssText = `display:inline-block;width:10px;height:10px;border-radius:50%;margin-right:5px;background:${colour}`;
    item.append(dot, document.createTextNode(meaning));
    legend.append(item);
  }
  const method = document.createElement("p");
  method.style.cssText = "margin:2px 0;font-size:12px;color:var(--jp-ui-font-color2,#555)";
  el.append(frame, legend, words, method);

  let viewer = null;
  const draw = () => {
    words.textContent = model.get("_sentence");
    method.textContent = model.get("_model_words");
    frame.setAttribute("aria-label", model.get("_sentence"));
    const calls = model.get("_calls");
    if (!viewer) return;
    replay(viewer, calls);
    frame.dataset.drawn = String(calls.length);
  };
  draw();
  const bytes = model.get("_library");
  loadLibrary(bytes.buffer ? bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength) : bytes)
    .then((library) => {
      // Antialiasing costs ten times the drawing time on a software renderer.
      viewer = library.createViewer(frame, { backgroundColor: "white", antialias: !softwareRenderer() });
      draw();
    })
    .catch((error) => {
      frame.textContent = `The 3D picture cannot be drawn here (${error.message}). The sentence below says what it would show.`;
    });

  const changed = () => draw();
  model.on("change:_calls", changed);
  model.on("change:_sentence", changed);
  const resized = new ResizeObserver(() => viewer && viewer.resize());
  resized.observe(frame);
  return () => {
    model.off("change:_calls", changed);
    model.off("change:_sentence", changed);
    resized.disconnect();
    if (viewer) {
      const gl = frame.querySelector("canvas")?.getContext("webgl2");
      gl?.getExtension("WEBGL_lose_context")?.loseContext();
    }
  };
}

function softwareRenderer() {
  const gl = document.createElement("canvas").getContext("webgl2");
  if (!gl) return true;
  const info = gl.getExtension("WEBGL_debug_renderer_info");
  const name = info ? String(gl.getParameter(info.UNMASKED_RENDERER_WEBGL)) : "";
  gl.getExtension("WEBGL_lose_context")?.loseContext();
  return /swiftshader|llvmpipe|software/i.test(name);
}

export default { render };
