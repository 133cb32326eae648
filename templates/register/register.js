// Search, filter and sort over the rows of the data files. Labels only ever become text nodes.
"use strict";
(() => {
  const list = document.getElementById("list");
  const form = document.getElementById("filter");
  const count = document.getElementById("count");
  const pager = document.getElementById("pager");
  const root = list ? list.dataset.root : "";
  const ownStudy = list ? list.dataset.study : "";
  const PER_PAGE = 100;
  const FIELDS = ["text", "study", "state", "overall", "criteria", "folio", "from", "to"];
  const SIGNS = { draft: "draft", "in review": "review", approved: "approved", superseded: "superseded", void: "void", failed: "failed" };
  const ATTENTION = ["not met", "changed", "missing", "not readable", "failed", "no result"];

  let total = 0, pageSize = 500, pages = [], loaded = 0, failed = 0, waiting = [];
  let rows = [], titles = new Map(), matches = null, page = 0, drawn = false;
  let sort = { key: "time", up: false };

  // ---- what the data files call
  window.register = {
    begin(contents) {
      total = contents.total;
      pageSize = contents.pageSize;
      pages = new Array(Math.ceil(total / pageSize)).fill(null);
      titles = new Map(contents.studies);
      if (list && pages.length) start(contents.studies);
    },
    take(number, data) {
      if (number < 1 || number > pages.length || pages[number - 1]) return;
      pages[number - 1] = data.map((cells, at) => row(cells, (number - 1) * pageSize + at + 1));
      loaded += 1;
    },
    stands(seq, sha256) {
      const line = document.getElementById("register-stands");
      const made = document.getElementById("made-by");
      if (line && !made) line.textContent = `The register as a whole stands at entry ${seq} of the audit trail, SHA-256 ${sha256.slice(0, 16)}….`;
      if (made && location.protocol !== "file:") compare(made, seq);
    },
  };

  function compare(made, seq) {
    fetch("audit-trail.head", { cache: "no-store" }).then((answer) => answer.json()).then((head) => {
      if (!(head.seq > seq)) return;
      const told = node("p", "notice");
      told.setAttribute("role", "status");
      told.append(node("strong", "look", "Older than the audit trail:"), ` it has ${head.seq - seq} more entries than these pages know; assayfolio index brings them up to date.`);
      document.querySelector("h1").after(told);
    }).catch(() => {});
  }

  function row(cells, place) {
    const [study, number, lot, time, state, standing, overall, criteria, execution, executions, folio, by] = cells;
    return { place, study, number, lot, time, state, standing, overall, criteria, execution, executions, folio, by, name: `run-${String(number).padStart(4, "0")}`, hay: null };
  }

  // ---- loading: newest first, a few files at a time
  function start(studies) {
    const chooser = document.getElementById("f-study");
    if (chooser) for (const [study] of studies) chooser.append(new Option(study, study));
    for (const head of list.tHead.rows[0].cells) if (head.dataset.sort) makeSortable(head);
    form.hidden = false;
    fromAddress();
    if (asked()) whenLoaded();
    form.addEventListener("input", () => { page = 0; toAddress(); whenLoaded(); });
    form.addEventListener("submit", (event) => event.preventDefault());
    form.addEventListener("reset", () => setTimeout(() => { page = 0; toAddress(); whenLoaded(); document.getElementById("f-text").focus(); }));
    document.getElementById("p-newer").addEventListener("click", () => turn(-1));
    document.getElementById("p-older").addEventListener("click", () => turn(1));
    window.addEventListener("hashchange", () => { fromAddress(); whenLoaded(); });
    if (total > list.tBodies[0].rows.length) showPager();
  }

  let loading = false;
  function loadAll(then) {
    if (loaded + failed === pages.length) { then(); return; }
    waiting = [then];
    if (loading) return;
    loading = true;
    let next = pages.length;
    let running = 0;
    const more = () => {
      while (running < 4 && next > 0) {
        const number = next--;
        running += 1;
        const script = document.createElement("script");
        script.src = `${ownStudy ? "" : "_register/data/"}runs-${String(number).padStart(4, "0")}.js`;
        script.onload = script.onerror = (event) => {
          running -= 1;
          if (event.type === "error" || !pages[number - 1]) failed += 1;
          script.remove();
          if (loaded + failed === pages.length) {
            rows = [];
            for (let at = pages.length - 1; at >= 0; at -= 1) if (pages[at]) for (let in_ = pages[at].length - 1; in_ >= 0; in_ -= 1) rows.push(pages[at][in_]);
            const waited = waiting;
            waiting = [];
            waited.forEach((one) => one());
          } else {
            more();
          }
        };
        document.head.append(script);
      }
    };
    more();
  }

  function whenLoaded() {
    if (loaded + failed < pages.length) say(`Reading ${spaced(total)} runs…`);
    loadAll(search);
  }

  // ---- what is asked for, in the address too
  const value = (name) => { const field = document.getElementById(`f-${name}`); return field ? field.value.trim() : ""; };
  const asked = () => FIELDS.some((name) => value(name)) || sort.key !== "time" || sort.up || page > 0;

  function fromAddress() {
    const given = new URLSearchParams(location.hash.slice(1));
    for (const name of FIELDS) { const field = document.getElementById(`f-${name}`); if (field) field.value = given.get(name) || ""; }
    const [key, way] = (given.get("sort") || "time-down").split("-");
    sort = { key: key in KEYS ? key : "time", up: way === "up" };
    page = Math.max(0, (parseInt(given.get("page"), 10) || 1) - 1);
    showSort();
  }

  function toAddress() {
    const given = new URLSearchParams();
    for (const name of FIELDS) if (value(name)) given.set(name, value(name));
    if (sort.key !== "time" || sort.up) given.set("sort", `${sort.key}-${sort.up ? "up" : "down"}`);
    if (page) given.set("page", String(page + 1));
    history.replaceState(null, "", `#${given}`);
  }

  // ---- search, filter, sort
  const KEYS = {
    run: (one) => `${one.study} ${String(one.number).padStart(9, "0")}`,
    time: (one) => one.place,
    state: (one) => one.state,
    overall: (one) => one.overall,
    criteria: (one) => one.criteria,
    executions: (one) => one.executions * 1e6 + one.execution,
    folio: (one) => one.folio,
  };

  function hay(one) {
    if (one.hay === null) one.hay = `${one.study} ${one.name} ${one.lot} ${titles.get(one.study) || ""} ${one.by} ${one.state} ${one.standing} ${one.overall} ${one.criteria} ${one.folio} ${one.time.slice(0, 10)}`.toLowerCase();
    return one.hay;
  }

  const begins = (words, wanted) => !wanted || words === wanted || words.startsWith(`${wanted} `);

  function search() {
    const words = value("text").toLowerCase().split(/\s+/).filter(Boolean);
    const [study, state, overall, criteria, folio, from, to] = FIELDS.slice(1).map(value);
    matches = rows.filter((one) =>
      (!study || one.study === study) && (!state || one.state === state) && (!folio || one.folio === folio) &&
      begins(one.criteria, criteria) && (begins(one.overall, overall) || one.overall.split("; ").some((part) => part.endsWith(`: ${overall}`))) &&
      (!from || one.time.slice(0, 10) >= from) && (!to || one.time.slice(0, 10) <= to) && words.every((word) => hay(one).includes(word)));
    const key = KEYS[sort.key];
    if (sort.key !== "time" || sort.up) {
      const keyed = matches.map((one) => [key(one), one]);
      keyed.sort(([a, one], [b, two]) => (a < b ? -1 : a > b ? 1 : two.place - one.place) * (a === b || sort.up ? 1 : -1));
      matches = keyed.map(([, one]) => one);
    }
    page = Math.min(page, Math.max(0, Math.ceil(matches.length / PER_PAGE) - 1));
    draw();
  }

  function turn(by) {
    page += by;
    toAddress();
    loadAll(() => { search(); list.parentElement.scrollIntoView(); });
  }

  // ---- drawing
  function node(kind, cls, text) {
    const made = document.createElement(kind);
    if (cls) made.className = cls;
    if (text !== undefined) made.textContent = text;
    return made;
  }

  function said(words) {
    return ATTENTION.some((one) => words.startsWith(one)) ? node("strong", "look", words) : document.createTextNode(words);
  }

  function stateOf(words) {
    const made = node("span", "state");
    const mark = node("span", `mark mark-${SIGNS[words] || "open"}`);
    mark.setAttribute("aria-hidden", "true");
    made.append(mark, words);
    return made;
  }

  function link(words, path, label) {
    const made = node("a", "", words);
    made.href = root + path;
    if (label) made.setAttribute("aria-label", label);
    return made;
  }

  function under(before, words) {
    const made = node("span", "under", before);
    made.append(node("bdi", "", words));
    return made;
  }

  function cell(kind, cls, ...parts) {
    const made = node(kind, cls);
    made.append(...parts);
    return made;
  }

  function openCell(one) {
    const made = node("td", "open");
    if (!["unchanged", "changed", "not readable"].includes(one.folio)) { made.textContent = "–"; return made; }
    const folio = `${one.study}/${one.name}/`, what = `${one.study} ${one.name}`;
    if (one.overall !== "no result") made.append(link("Report", `${folio}data/report.pdf`, `Report of ${what}, PDF`), " ", link("Findings", `${folio}data/findings.json`, `Findings of ${what}, JSON`), " ");
    made.append(link("Folio", folio, `Folio of ${what}, folder`));
    return made;
  }

  function line(one) {
    const made = document.createElement("tr");
    const head = cell("th", "", link(`${one.study} ${one.name}`, `_register/studies/${one.study}/${one.name}.html`));
    head.scope = "row";
    if (one.lot) head.append(under("lot ", one.lot));
    const state = cell("td", "", stateOf(one.state));
    if (one.standing) state.append(under("", one.standing));
    made.append(head, cell("td", "time", `${one.time.slice(0, 10)} ${one.time.slice(11, 16)}`), state, cell("td", "", cell("bdi", "", said(one.overall))), cell("td", "kept", said(one.criteria)),
      cell("td", "kept", one.executions ? `${one.execution} of ${one.executions}` : "–"), cell("td", "kept", said(one.folio)), openCell(one));
    return made;
  }

  function draw() {
    drawn = true;
    const first = page * PER_PAGE;
    const shown = matches.slice(first, first + PER_PAGE);
    const body = document.createElement("tbody");
    body.append(...shown.map(line));
    if (!shown.length) { const none = cell("td", "", "No run matches."); none.colSpan = 8; body.append(cell("tr", "", none)); }
    list.tBodies[0].replaceWith(body);
    const all = matches.length === rows.length ? `${spaced(rows.length)} runs` : `${spaced(matches.length)} of ${spaced(rows.length)} runs match`;
    const missing = failed ? ` ${failed} data files could not be read: run assayfolio index --rebuild.` : "";
    say(`${all}${shown.length < matches.length ? `; shown ${spaced(first + 1)} to ${spaced(first + shown.length)}` : ""}.${missing}`);
    showPager();
  }

  function showPager() {
    const of = drawn ? matches.length : total;
    pager.hidden = of <= PER_PAGE;
    const last = Math.max(1, Math.ceil(of / PER_PAGE));
    document.getElementById("p-where").textContent = `Page ${spaced(page + 1)} of ${spaced(last)}`;
    document.getElementById("p-newer").disabled = page === 0;
    document.getElementById("p-older").disabled = page + 1 >= last;
  }

  function makeSortable(head) {
    const paper = node("span", "on-paper", head.textContent);
    const button = node("button", "", head.textContent);
    button.type = "button";
    button.addEventListener("click", () => {
      const key = head.dataset.sort;
      sort = { key, up: sort.key === key ? !sort.up : true };
      page = 0;
      showSort();
      toAddress();
      whenLoaded();
    });
    head.replaceChildren(button, paper);
  }

  function showSort() {
    for (const head of list.tHead.rows[0].cells) {
      if (head.dataset.sort === sort.key) head.setAttribute("aria-sort", sort.up ? "ascending" : "descending");
      else head.removeAttribute("aria-sort");
    }
  }

  let told = 0;
  function say(words) {
    clearTimeout(told);
    told = setTimeout(() => { count.textContent = words; }, 60);
  }

  const spaced = (number) => String(number).replace(/\B(?=(\d{3})+$)/g, "\u202f");
})();
