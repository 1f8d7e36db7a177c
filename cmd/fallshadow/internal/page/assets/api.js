// Requests to the program that serves the page.

async function checked(response) {
  if (!response.ok) throw new Error((await response.text()).trim() || response.statusText);
  return response.status === 204 ? null : response.json();
}

const asking = new Set(); // ends what is being asked

// get asks until a signal comes, a connection must have died, or giveUp ends it.
export async function get(path, parameters = {}, signal) {
  const end = new AbortController(), timer = setTimeout(() => end.abort(lost()), 60000);
  signal?.addEventListener("abort", () => end.abort(signal.reason));
  asking.add(end);
  try {
    return await checked(await fetch(path + "?" + new URLSearchParams(parameters), { signal: end.signal }));
  } finally {
    clearTimeout(timer);
    asking.delete(end);
  }
}

// giveUp ends all that is being asked: the connection was lost, and no answer may come any more.
export function giveUp() {
  for (const end of asking) end.abort(lost());
}

const lost = () => new Error("the connection was lost");

export async function post(path, body) {
  return checked(await fetch(path, {
    method: "POST", headers: { "Content-Type": "application/json" }, body: JSON.stringify(body),
  }));
}

// pictureOf is the address of a picture; the mark of its view tells it from earlier ones.
export function pictureOf(kind, shot, mark) {
  return "/picture/" + kind + "?" + new URLSearchParams({ shot, mark });
}
