
// The slider and the filter. All that is told without them stands in the page as it was judged.

// The order in which gatecheck/render/page/numbers.py counts the standings.
const STANDINGS = ["falls-short", "undecided", "waived", "stands"];
const [SHORT, UNDECIDED, WAIVED, STANDS] = [0, 1, 2, 3];
// The box of the risk plot, as in gatecheck/render/page/risk_plot.py.
const BOX = { left: 94, right: 536, top: 20, bottom: 272, decades: 3, odds: Math.log(99) };
const MOST_NAMED = 5;

const byId = (id) => document.getElementById(id);
const numbers = JSON.parse(byId("numbers").textContent);
const claims = [...document.querySelectorAll(".claim")].map((element, row) => {
  const [standing, folder, rules, claimed, weighed, risk, interval] = numbers.claims[row];
  const drawing = risk || interval ? { risk, interval } : null;
  return { element, standing, folder, rules, claimed, weighed: weighed && weighedOf(weighed), now: standing, drawing };
});

function weighedOf([logRatio, limit, judged, waived, rest]) {
  return { logRatio, limit, judged, waived, rest };
}

const byElement = new Map(claims.map((claim) => [claim.element, claim]));

function filled(template, values) {
  return template.replace(/\{(\d)\}/g, (_, slot) => values[slot]);
}

// Draws a claim that is opened for the first time; what fills the templates are numbers and no text from outside.
function draw(claim) {
  const { risk, interval } = claim.drawing, { templates } = numbers;
  const plots = document.createElement("div");
  plots.className = "plots";
  plots.setAttribute("aria-hidden", "true");
  if (risk) plots.innerHTML += filled(templates.risk, risk);
  if (interval) {
    const [main, ...ticks] = interval, all = (template) => ticks.map((tick) => filled(template, tick)).join("");
    plots.innerHTML += filled(templates.view, [filled(templates.interval, main), all(templates.tick), all(templates.label)]);
  }
  claim.element.querySelector(":scope > :last-child").before(plots);
  claim.drawing = null;
}

addEventListener(
  "toggle",
  (event) => {
    const claim = byElement.get(event.target);
    if (claim?.drawing) draw(claim);
    if (claim?.prior) moveDot(claim);
  },
  true,
);

// Those that were open before this program was there to hear of it.
setTimeout(() => claims.filter((claim) => claim.drawing && claim.element.open).forEach(draw));

// What the page shows of a claim, looked up when the slider is first moved.
function partsOf(claim) {
  if (claim.parts) return claim.parts;
  const now = claim.element.querySelector("summary b");
  const then = now.parentElement.appendChild(document.createElement("span"));
  then.className = "then";
  claim.parts = { now, then, asJudged: now.textContent };
  return claim.parts;
}

function riskAt(logRatio, prior) {
  return 1 / (1 + Math.exp(logRatio + Math.log(prior) - Math.log1p(-prior)));
}

// The standing of a claim whose other rules stay as they were judged.
function standingAt(claim, risk) {
  const { judged, limit, waived, rest } = claim.weighed;
  if (!judged) return claim.standing;
  const short = risk > limit;
  if (rest === SHORT || (short && !waived)) return SHORT;
  if (rest === UNDECIDED) return UNDECIDED;
  return rest === WAIVED || short ? WAIVED : STANDS;
}

// Where the ring of a claim stands, at another prior or as judged.
function moveDot(claim) {
  const dot = claim.element.querySelector(".d");
  if (!dot) return;
  claim.ring ??= [dot.getAttribute("cx"), dot.getAttribute("cy")];
  const [x, y] = claim.prior ? placeOf(claim.prior, riskAt(claim.weighed.logRatio, claim.prior)) : claim.ring;
  dot.setAttribute("cx", x);
  dot.setAttribute("cy", y);
}

function placeOf(prior, risk) {
  const odds = Math.log(prior) - Math.log1p(-prior), decades = Math.min(BOX.decades, -Math.log10(risk));
  const across = (odds + BOX.odds) / (2 * BOX.odds), down = decades / BOX.decades;
  return [BOX.left + across * (BOX.right - BOX.left), BOX.top + down * (BOX.bottom - BOX.top)];
}

const WOULD = ["be short of the policy", "be undecided", "be waived", "stand"];

function showAt(claim, prior) {
  const { now, then, asJudged } = partsOf(claim);
  const risk = riskAt(claim.weighed.logRatio, prior);
  claim.prior = prior;
  claim.now = standingAt(claim, risk);
  now.textContent = `${kept(percent(risk, claim.weighed.limit))} at prior ${shownPrior(prior)}`;
  const would = claim.weighed.judged ? ` There the claim would ${WOULD[claim.now]}.` : "";
  then.textContent = `${would} As judged: ${asJudged}.`;
  claim.element.classList.toggle("otherwise", claim.now !== claim.standing);
  if (claim.element.open) moveDot(claim);
}

function showAsJudged(claim) {
  if (!claim.parts) return;
  const { now, then, asJudged } = claim.parts;
  claim.prior = null;
  claim.now = claim.standing;
  now.textContent = asJudged;
  then.textContent = "";
  claim.element.classList.remove("otherwise");
  moveDot(claim);
}

// A number stays with its unit.
function kept(text) {
  return text.replace(" %", "\u00a0%");
}

function shownPrior(prior) {
  return String(Number(prior.toPrecision(4)));
}

function nameOf(claim) {
  return claim.element.querySelector("summary code").textContent;
}

function count(key, standing) {
  return claims.filter((claim) => claim.claimed && claim[key] === standing).length;
}

function tellAt(prior) {
  const others = claims.filter((claim) => claim.now !== claim.standing).map(nameOf);
  const more = others.length > MOST_NAMED ? ` and ${others.length - MOST_NAMED} more` : "";
  const named = others.length ? `Other than as judged: ${others.slice(0, MOST_NAMED).join(", ")}${more}. ` : "";
  return (
    `With a prior of ${shownPrior(prior)} for every claim, ${count("now", SHORT)} would be short of the policy ` +
    `(${count("standing", SHORT)} as judged), ${count("now", STANDS)} would stand ` +
    `(${count("standing", STANDS)} as judged). ${named}` +
    "This is for orientation only: the verdict of the policy stays as it is."
  );
}

const slide = byId("slide"), field = byId("prior"), weighed = claims.filter((claim) => claim.weighed);
let pending = 0;

function atPrior(prior) {
  cancelAnimationFrame(pending);
  pending = requestAnimationFrame(() => {
    weighed.forEach((claim) => showAt(claim, prior));
    byId("told").textContent = tellAt(prior);
  });
}

function asJudged() {
  cancelAnimationFrame(pending);
  weighed.forEach(showAsJudged);
  slide.value = field.value = slide.defaultValue;
  byId("told").textContent = byId("told").dataset.asJudged;
}

if (slide) {
  byId("told").dataset.asJudged = byId("told").textContent;
  slide.addEventListener("input", () => {
    field.value = slide.value;
    atPrior(Number(slide.value));
  });
  field.addEventListener("input", () => {
    if (!field.validity.valid || field.value === "") return;
    slide.value = field.value;
    atPrior(Number(field.value));
  });
  byId("as-judged").addEventListener("click", asJudged);
}

const filters = ["standing", "rule", "folder"].map((name) => byId(`by-${name}`));

function isWithin(folder, chosen) {
  for (let each = folder; each >= 0; each = numbers.parents[each]) if (each === chosen) return true;
  return false;
}

function filter() {
  const [standing, rule, folder] = filters.map((each) => (each.value === "" ? null : Number(each.value)));
  let shown = 0;
  for (const claim of claims) {
    const fits =
      (standing === null || claim.standing === standing) &&
      (rule === null || claim.rules.includes(rule)) &&
      (folder === null || isWithin(claim.folder, folder));
    claim.element.hidden = !fits;
    shown += fits;
  }
  // Of what is far from the window the height is only guessed, and a filter would make the guess a bad one.
  document.body.classList.toggle("filtered", shown < claims.length);
  for (const around of document.querySelectorAll(".claims, .part")) {
    around.hidden = !around.querySelector(".claim:not([hidden])");
  }
  byId("count").textContent = `Shown: ${shown} of ${claims.length}.`;
}

function showAll() {
  filters.forEach((each) => (each.value = ""));
  filter();
}

if (claims.length) {
  filters.forEach((each) => each.addEventListener("change", filter));
  byId("all").addEventListener("click", showAll);
  byId("tools").hidden = false;
  // What is printed and signed is the verdict as it was judged, and all of it.
  addEventListener("beforeprint", () => {
    claims.filter((claim) => claim.drawing).forEach(draw);
    showAll();
    if (slide) asJudged();
  });
}

// A link to a claim opens it, also where the filter hides it.
addEventListener("hashchange", () => {
  const claim = byElement.get(byId(location.hash.slice(1)));
  if (!claim) return;
  if (claim.element.hidden) showAll();
  claim.element.open = true;
  claim.element.scrollIntoView();
});
