// Starts 3Dmol.js from the text embedded below, once per page. py3Dmol fetches its
// own copy from a public address unless window.$3Dmolpromise exists when its script
// runs, so the promise is set before anything is awaited.
(() => {
  if (window.$3Dmolpromise) return;
  const here = document.currentScript;

  async function unpack(base64) {
    const bytes = Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
    const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("gzip"));
    return new Response(stream).text();
  }

  // The library hands itself to an AMD or CommonJS loader if it sees one, and then
  // never reaches window. The wrapper hides both without touching the page's own.
  function start(text) {
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

  window.$3Dmolpromise = unpack("GZIP_BASE64").then(start);
  window.$3Dmolpromise.catch((error) => {
    const words = document.createElement("p");
    words.setAttribute("role", "alert");
    words.textContent = `The 3D picture cannot be drawn: 3Dmol.js did not start (${error.message}).`;
    if (here && here.parentNode) here.after(words);
    else document.body.append(words);
  });
})();
