// Replays a scene (libtool/approach/scene.py) on a 3Dmol.js viewer.
// Shared by the notebook viewer and the HTML report.

export function replay(viewer, calls) {
  viewer.removeAllLabels();
  viewer.removeAllShapes();
  viewer.removeAllModels();
  for (const [name, args] of calls) {
    viewer[name](...args);
  }
  viewer.render();
}

// One copy of 3Dmol.js per page, however many views: the promise lives on window.
export function loadLibrary(gzipped) {
  if (!window.$3Dmolpromise) {
    window.$3Dmolpromise = unpack(gzipped).then(runScript);
  }
  return window.$3Dmolpromise.then(() => window.$3Dmol);
}

function unpack(gzipped) {
  const stream = new Blob([gzipped]).stream().pipeThrough(new DecompressionStream("gzip"));
  return new Response(stream).text();
}

// The library hands itself to an AMD or CommonJS loader if it sees one, and then
// never reaches window. The wrapper hides both without touching the page's own.
function runScript(text) {
  const wrapped = ["(function (define, exports, module) {", text, "}).call(window);"].join("\n");
  const url = URL.createObjectURL(new Blob([wrapped], { type: "text/javascript" }));
  return new Promise((resolve, reject) => {
    const tag = document.createElement("script");
    tag.onload = () => resolve();
    tag.onerror = () => reject(new Error("the page does not allow the script to run"));
    tag.src = url;
    document.head.appendChild(tag);
  }).finally(() => URL.revokeObjectURL(url));
}
