// The page: set-up, trials, result. The key lives in this closure only and is never written to the page before the end.
(() => {
  const byId = (id) => document.getElementById(id);
  const LEVEL_5 = 0.05;
  const state = { deck: null, context: null, seal: null, answers: [], heard: "", playing: false, heardX: false };

  const say = (text) => { byId("status").textContent = text; };
  const trials = () => Number(byId("trials").value);
  const show = (id) => {
    for (const part of ["setup", "run", "result"]) byId(part).hidden = part !== id;
    byId(`${id}-title`).focus();
  };

  function bytesOf(id) {
    const text = atob(byId(id).textContent.trim());
    return Uint8Array.from(text, (c) => c.charCodeAt(0)).buffer;
  }

  function needed() {
    const least = fewest(trials(), LEVEL_5);
    byId("needed").textContent = `With ${trials()} trials, ${least} right answers or more are rarer than 1 in 20 by guessing.`;
  }

  async function begin() {
    byId("begin").disabled = true;
    try {
      state.context = new AudioContext({ sampleRate: Number(document.body.dataset.rate) });
      const both = [bytesOf("audio-a"), bytesOf("audio-b")].map((bytes) => state.context.decodeAudioData(bytes));
      const [first, second] = await Promise.all(both);
      await state.context.resume();
      state.deck = new Deck(state.context, first, second);
      byId("from").max = byId("to").max = byId("to").value = first.duration.toFixed(2);
      state.seal = drawSeal(trials());
      state.answers = [];
      byId("seal").textContent = state.seal.hash;
      byId("progress").max = trials();
      setLevel();
      nextTrial();
      show("run");
    } catch (error) {
      byId("begin").disabled = false;
      say(`The recordings cannot be played here: ${error.message}`);
    }
  }

  function nextTrial() {
    const number = state.answers.length + 1;
    byId("run-title").textContent = `Trial ${number} of ${trials()}`;
    byId("progress").value = number - 1;
    state.heardX = false;
    mark("");
    if (state.playing) hear("A");
    allowAnswers();
  }

  function allowAnswers() {
    for (const id of ["is-a", "is-b"]) byId(id).setAttribute("aria-disabled", String(!state.heardX));
  }

  // The side behind X; nothing else in the page knows.
  const behind = (name) => (name === "X" ? state.seal.key[state.answers.length] : name);

  function mark(name) {
    state.heard = name;
    for (const side of ["A", "B", "X"]) byId(`hear-${side.toLowerCase()}`).setAttribute("aria-pressed", String(side === name));
  }

  function hear(name) {
    if (!state.playing) start();
    state.deck.select(behind(name), state.context.currentTime + 0.005);
    mark(name);
    if (name === "X") {
      state.heardX = true;
      allowAnswers();
    }
    say(`Playing ${name}`);
  }

  function start() {
    const from = Number(byId("from").value);
    const to = Number(byId("to").value);
    const end = state.deck.buffers.A.duration;
    const [low, high] = from < to ? [Math.max(0, from), Math.min(end, to)] : [0, end];
    state.deck.play(state.context.currentTime + 0.03, low, high);
    state.playing = true;
    byId("pause").textContent = "Pause";
  }

  function pause() {
    if (state.playing) {
      state.deck.stop();
      state.playing = false;
      byId("pause").textContent = "Play";
      say("Paused");
    } else hear(state.heard || "A");
  }

  function setLevel() {
    const decibels = Number(byId("level").value);
    byId("level-text").textContent = `${decibels} dB`.replace("-", "−");
    if (state.deck) state.deck.setLevel(decibels, state.context.currentTime);
  }

  function answer(side) {
    if (!state.heardX) {
      say("Listen to X first");
      return;
    }
    state.answers.push(side);
    if (state.answers.length < trials()) {
      say(`Answer ${state.answers.length} noted`);
      nextTrial();
    } else finish();
  }

  function finish() {
    if (state.playing) pause();
    const key = [...state.seal.key];
    const right = key.filter((side, i) => side === state.answers[i]).length;
    const p = chance(right, key.length);
    byId("progress").value = key.length;
    byId("score").textContent = `${right} of ${key.length} right`;
    byId("p-value").textContent = p.toFixed(4);
    byId("meaning").textContent = p <= LEVEL_5
      ? "A difference was heard: a score like this is rarer than 1 in 20 by guessing."
      : "No difference was shown. That does not prove that there is none: another passage or more trials may show it.";
    byId("key").textContent = state.seal.key;
    byId("salt").textContent = state.seal.salt;
    byId("opened").textContent = state.seal.hash;
    const rows = key.map((side, i) => {
      const row = document.createElement("tr");
      const head = document.createElement("th");
      head.scope = "row";
      head.textContent = String(i + 1);
      row.append(head);
      for (const text of [side, state.answers[i], side === state.answers[i] ? "right" : "wrong"]) {
        const cell = document.createElement("td");
        cell.textContent = text;
        row.append(cell);
      }
      return row;
    });
    byId("answers").replaceChildren(...rows);
    show("result");
    say(`${right} of ${key.length} right, p = ${p.toFixed(4)}`);
  }

  function again() {
    if (state.context) state.context.close();
    Object.assign(state, { deck: null, context: null, seal: null, answers: [], heard: "", playing: false });
    byId("begin").disabled = false;
    byId("pause").textContent = "Play";
    say("");
    show("setup");
  }

  const KEYS = {
    a: () => hear("A"), b: () => hear("B"), x: () => hear("X"), p: pause,
    1: () => answer("A"), 2: () => answer("B"),
  };

  document.addEventListener("keydown", (event) => {
    const typing = event.target.matches("input, select, textarea");
    if (event.repeat || event.ctrlKey || event.metaKey || event.altKey || typing || byId("run").hidden) return;
    const digit = /^(?:Digit|Numpad)([12])$/.exec(event.code); // some keyboards have digits on the shifted level
    const action = KEYS[digit ? digit[1] : event.key.toLowerCase()];
    if (action) {
      event.preventDefault();
      action();
    }
  });

  const CLICKS = {
    begin, pause, again, "hear-a": KEYS.a, "hear-b": KEYS.b, "hear-x": KEYS.x, "is-a": KEYS[1], "is-b": KEYS[2],
  };
  for (const [id, action] of Object.entries(CLICKS)) byId(id).addEventListener("click", action);
  byId("trials").addEventListener("change", needed);
  byId("level").addEventListener("input", setLevel);
  for (const id of ["from", "to"]) byId(id).addEventListener("change", () => { if (state.playing) start(); });
  needed();
  setLevel();
})();
