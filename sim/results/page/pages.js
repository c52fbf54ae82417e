// Small conveniences of the page: copying the input, printing with all figures open, marking where one is in the contents.
import {element} from "./figures.js";

export function placeCopyButtons() {
  for (const text of document.querySelectorAll("pre.copy")) {
    const said = element("span", {role: "status", class: "count"});
    const button = element("button", {type: "button", class: "plain"}, "Copy this text");
    button.addEventListener("click", async () => {
      try {
        await navigator.clipboard.writeText(text.textContent);
        said.textContent = "copied";
      } catch {
        getSelection().selectAllChildren(text);
        said.textContent = "selected; press Ctrl+C";
      }
    });
    text.before(element("p", {class: "search"}, button, " ", said));
  }
}

export function markContents() {
  const links = new Map([...document.querySelectorAll("nav.contents a")].map((link) => [link.getAttribute("href").slice(1), link]));
  const seen = new Set();
  const watcher = new IntersectionObserver((entries) => {
    for (const entry of entries) entry.isIntersecting ? seen.add(entry.target.id) : seen.delete(entry.target.id);
    const first = [...links.keys()].find((id) => seen.has(id));
    for (const [id, link] of links) id === first ? link.setAttribute("aria-current", "true") : link.removeAttribute("aria-current");
  }, {rootMargin: "-10% 0px -60% 0px"});
  for (const id of links.keys()) {
    const section = document.getElementById(id);
    if (section) watcher.observe(section);
  }
}
