// Starts 3Dmol.js from the text embedded below, once per page. py3Dmol fetches its
// own copy from a public address unless window.$3Dmolpromise exists when its script
// runs, so the promise is set before anything is awaited. SHARED is scene.js.
(() => {
  if (window.$3Dmolpromise) return;
  const here = document.currentScript;
  SHARED
  const packed = Uint8Array.from(atob("GZIP_BASE64"), (letter) => letter.charCodeAt(0));
  loadLibrary(packed).catch((error) => {
    const words = document.createElement("p");
    words.setAttribute("role", "alert");
    words.textContent = `The 3D picture cannot be drawn: 3Dmol.js did not start (${error.message}).`;
    if (here && here.parentNode) here.after(words);
    else document.body.append(words);
  });
})();
