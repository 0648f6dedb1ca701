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

// The library registers itself with an AMD loader if it sees one; hide that for
// the time of the call so that it always ends up on window.
function runScript(text) {
  const kept = window.define;
  window.define = undefined;
  return new Promise((resolve, reject) => {
    const url = URL.createObjectURL(new Blob([text], { type: "text/javascript" }));
    const tag = document.createElement("script");
    const settle = (then) => () => {
      window.define = kept;
      URL.revokeObjectURL(url);
      then();
    };
    tag.onload = settle(resolve);
    tag.onerror = settle(() => reject(new Error("3Dmol.js could not be started")));
    tag.src = url;
    document.head.appendChild(tag);
  });
}
