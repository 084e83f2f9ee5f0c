// Keeps an open board up to date: fetches what changes every minute, rests while the page is hidden, and says so when
// it can't. Without this script the board is complete as it was when it was opened.
const EVERY_MS = 60_000;
const now = document.getElementById("board-now");
const clock = document.getElementById("board-clock");
let timer = 0;

async function look() {
  try {
    const answer = await fetch(now.dataset.fetch, { headers: { "X-Requested-With": "fetch" }, redirect: "manual" });
    if (answer.type === "opaqueredirect") {
      // Signed out: the page itself leads to the sign-in.
      location.reload();
      return;
    }
    if (!answer.ok) throw new Error(String(answer.status));
    const text = await answer.text();
    const fresh = new DOMParser().parseFromString(text, "text/html").body;
    keepOpen(fresh);
    const sentence = now.querySelector("h1").textContent;
    const at = fresh.querySelector("[data-at]").dataset.at;
    now.replaceChildren(...fresh.childNodes);
    clock.textContent = `As of ${at}. Looks again by itself every minute.`;
    // Read out only when the answer to "is anything wrong?" has changed.
    clock.setAttribute("aria-live", "off");
    if (now.querySelector("h1").textContent !== sentence) {
      clock.setAttribute("aria-live", "polite");
      clock.textContent = `${now.querySelector("h1").textContent} As of ${at}.`;
    }
    clock.classList.remove("action");
  } catch {
    clock.classList.add("action");
    const seen = now.querySelector("[data-at]").dataset.at;
    clock.textContent = `Not updated since ${seen}: the server can't be reached. Trying again every minute.`;
  }
}

// What the reader has opened stays open.
function keepOpen(fresh) {
  const open = [...now.querySelectorAll("details")].map((one) => one.open);
  [...fresh.querySelectorAll("details")].forEach((one, index) => {
    if (open[index]) one.open = true;
  });
}

function start() {
  stop();
  timer = setInterval(look, EVERY_MS);
}

function stop() {
  clearInterval(timer);
}

document.addEventListener("visibilitychange", () => {
  if (document.hidden) {
    stop();
  } else {
    look();
    start();
  }
});
start();
