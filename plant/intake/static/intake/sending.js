// One entry to the server, as often as it must: the id is the entry's own, so a repeat adds nothing.

const WAIT_MS = 10000;

// {state: "taken" | "refused" | "unsent", body, status}. "unsent" is anything that may come right by itself.
export async function send(address, entry, token) {
  const response = await put(address + entry.id, entry.body, token);
  if (response === null) return { state: "unsent", status: 0, body: {} };
  // A session that has ended answers with a redirect to the sign-in page, or refuses.
  if (response.type === "opaqueredirect" || response.status === 401 || response.status === 403) {
    const body = await response.json().catch(() => ({}));
    return { state: "unsent", status: response.status, body, signedOut: true };
  }
  const body = await response.json().catch(() => ({}));
  if (response.status === 200 || response.status === 201) return { state: "taken", status: response.status, body };
  if (response.status === 409 || response.status === 413 || response.status === 422) return { state: "refused", status: response.status, body };
  return { state: "unsent", status: response.status, body };
}

// The response, or null when none came.
export async function put(address, body, token) {
  try {
    return await fetch(address, {
      method: "PUT",
      headers: { "Content-Type": "application/json", "X-CSRFToken": token, "X-Device-Sent-At": new Date().toISOString() },
      body: JSON.stringify(body),
      credentials: "same-origin",
      redirect: "manual",
      signal: AbortSignal.timeout(WAIT_MS),
    });
  } catch {
    return null;
  }
}

// The token of the cookie is always the newest; a page kept for the time without a network holds an old one.
export function token(form) {
  const found = /(?:^|; )csrftoken=([^;]+)/.exec(document.cookie);
  return found ? found[1] : (form?.elements.namedItem("csrfmiddlewaretoken")?.value ?? "");
}

export const hasToken = () => /(?:^|; )csrftoken=/.test(document.cookie);

export function newId() {
  return crypto.randomUUID();
}
