// Opens a trail beside the page instead of on a page of its own, where there is room. On a phone, with a modifier key, or
// without this script, the link is a link.
const ROOM = matchMedia("(min-width: 721px)");
let panel = null;

function made() {
  const dialog = document.createElement("dialog");
  dialog.className = "panel";
  dialog.setAttribute("aria-label", "How this number was made");
  const close = document.createElement("button");
  close.type = "button";
  close.className = "button second small";
  close.textContent = "Close";
  close.addEventListener("click", () => dialog.close());
  const inside = document.createElement("div");
  dialog.append(close, inside);
  dialog.addEventListener("click", (event) => {
    if (event.target === dialog) dialog.close();
  });
  document.body.append(dialog);
  return dialog;
}

async function open(href) {
  panel ??= made();
  const inside = panel.querySelector("div");
  inside.replaceChildren(Object.assign(document.createElement("p"), { textContent: "Reckoning …" }));
  panel.showModal();
  try {
    const address = new URL(href, location.href);
    address.searchParams.set("panel", "1");
    const answer = await fetch(address, { redirect: "error" });
    if (!answer.ok) throw new Error(String(answer.status));
    const fresh = new DOMParser().parseFromString(await answer.text(), "text/html").body;
    inside.replaceChildren(...fresh.childNodes);
  } catch {
    location.assign(href);
  }
}

document.addEventListener("click", (event) => {
  const link = event.target.closest?.("a");
  if (!link || event.defaultPrevented || event.ctrlKey || event.metaKey || event.shiftKey || !ROOM.matches) return;
  const href = link.getAttribute("href");
  if (!href?.includes("/trail/?")) return;
  event.preventDefault();
  open(href);
});
