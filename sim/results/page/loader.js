// Inflates the packed scripts and starts them. Plain and small: it is all that runs if the browser cannot inflate.
const root = document.documentElement;

async function inflated(id) {
  const packed = document.getElementById(id);
  if (!packed) return "";
  const bytes = Uint8Array.from(atob(packed.textContent.trim()), (sign) => sign.charCodeAt(0));
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("gzip"));
  return new Response(stream).text();
}

async function start() {
  const button = document.getElementById("theme");
  if (button) {
    button.hidden = false;
    button.addEventListener("click", () => {
      const dark = root.dataset.theme ? root.dataset.theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
      root.dataset.theme = dark ? "light" : "dark";
      root.dispatchEvent(new Event("themechange"));
    });
  }
  if (typeof DecompressionStream === "undefined") {
    root.classList.add("no-inflate");
    return;
  }
  root.classList.add("scripted");
  for (const id of ["packed-diagram", "packed-charts"]) {
    const text = await inflated(id);
    if (!text) continue;
    const script = document.createElement("script");
    script.textContent = text;
    document.body.append(script);
  }
}

start();
