// One viewer for the whole report; a button swaps its scene.

const scenes = JSON.parse(document.getElementById("scenes").textContent);
const frame = document.getElementById("viewer");
const title = document.getElementById("viewer-title");
const words = document.getElementById("viewer-words");
const buttons = [...document.querySelectorAll("button[data-scene]")];
let viewer = null;
let shown = -1;

function show(number) {
  shown = number;
  for (const button of buttons) {
    const own = Number(button.dataset.scene) === number;
    button.setAttribute("aria-pressed", String(own));
    button.closest(".card").classList.toggle("shown", own);
  }
  title.textContent = scenes[number].title;
  words.textContent = scenes[number].sentence;
  frame.setAttribute("aria-label", scenes[number].sentence);
  draw();
}

function draw() {
  if (!viewer || shown < 0) return;
  replay(viewer, scenes[shown].calls);
  frame.dataset.drawn = String(shown);
}

function sorry(reason) {
  const line = document.createElement("p");
  line.setAttribute("role", "alert");
  line.textContent = `The 3D picture cannot be drawn here (${reason}). The sentence below says what it would show.`;
  frame.replaceChildren(line);
}

function unpacked(base64) {
  return Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
}

if (frame && scenes.length > 0) {
  for (const button of buttons) {
    button.hidden = false;
    button.addEventListener("click", () => show(Number(button.dataset.scene)));
  }
  show(0);
  const packed = document.getElementById("library").textContent.trim();
  if (packed) {
    loadLibrary(unpacked(packed))
      .then((library) => {
        frame.replaceChildren();
        viewer = library.createViewer(frame, { backgroundColor: "white" });
        if (!viewer) throw new Error("this browser offers no WebGL");
        draw();
        new ResizeObserver(() => viewer.resize()).observe(frame);
      })
      .catch((error) => sorry(error.message));
  }
}
