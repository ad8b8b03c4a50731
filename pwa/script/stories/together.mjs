// Several phones, several marks, several people.

import { assert, until } from "../stage.mjs";

async function twoPhones(s) {
  const fake = await s.server();
  const a = await s.phone();
  const b = await s.phone();
  await Promise.all([a.whole(), b.whole(), a.engine(), b.engine()]);
  await until("both phones are connected", () => fake.clients === 2);
  return { fake, a, b };
}


export const stories = {
  "scenario 5: two phones mark, both are shown, the first is steered by until the choice is changed": async (s) => {
    const { fake, a, b } = await twoPhones(s);
    await a.mark();
    await b.returning();
    await b.settled();
    await b.tap("More", ".touch");
    await b.goes(54.101, 7.902);
    await b.page.locator("button[data-mark][data-person='1']").tap();
    await until("both marks are stored", () => fake.events.length === 2);
    assert.equal(fake.events[1].incident, fake.events[0].incident);
    await a.says("mark 1,");
    await a.tap("More", ".touch");
    await a.says("Mark 2");
    await a.tap("Steer by mark 2");
    await until("the choice is stored", () => fake.events.length === 3);
    assert.deepEqual(fake.events[2].body, { mark: fake.events[1].id });
    await b.says("mark 2,");
  },

  "scenario 6: not a person: the arrow clears everywhere, the log keeps it": async (s) => {
    const { fake, a, b } = await twoPhones(s);
    await a.mark();
    await b.returning();
    await b.settled();
    await b.tap("More", ".touch");
    await b.tap("Mark 1: not a person");
    await a.page.waitForSelector(".lines");
    await b.page.waitForSelector(".lines");
    await a.tap("Log");
    await a.says("Not a person");
    assert.deepEqual(fake.events.map((e) => e.kind), ["marked", "mark_dismissed"]);
  },

  "scenario 7: someone not in charge stands down: the one in charge is asked, steering stays up": async (s) => {
    const { fake, a, b } = await twoPhones(s);
    await a.mark();
    await b.returning();
    await a.settled();
    await a.tap("More", ".touch");
    await a.tap("I am in charge");
    await until("charge is taken", () => fake.events.length === 2);
    await a.tap("Back to the ring");
    await b.tap("More", ".touch");
    await b.says("In charge");
    await b.tap("Stand down", ".sheet");
    await b.page.locator(".sheet > button:not(.hold)", { hasText: "Stand down" }).tap();
    await b.tap("Yes, stand down");
    await until("the wish is stored", () => fake.events.length === 3);
    await a.says("asks to stand down");
    assert.equal(await a.page.locator(".ring").count(), 1);
    assert.equal(await b.page.locator(".ring").count(), 1);
    await a.tap("Agree");
    await a.tap("Yes, agree");
    await b.page.waitForSelector(".lines");
    await a.page.waitForSelector(".lines");
  },

  "scenario 17: alongside is not aboard: the clock runs, stand-down for all aboard is not offered": async (s) => {
    const { fake, a } = await twoPhones(s);
    await a.mark();
    await a.returning();
    await a.settled();
    await a.tap("ALONGSIDE");
    await a.says("Alongside is not aboard");
    await a.tap("More", ".touch");
    await a.tap("Stand down", ".sheet");
    await a.says("Person 1 is not aboard");
    assert(!(await a.text()).includes("All are aboard"));
    await a.tap("Back to the ring");
    await a.tap("ABOARD", ".touch");
    await a.tap("Unconscious");
    await until("it is stored", () => fake.events.at(-1).kind === "aboard");
    assert.deepEqual(fake.events.at(-1).body, { person: 1, condition: "unconscious" });
    await a.says("Get medical advice");
  },

  "scenario 31: two persons have two clocks; one aboard does not clear the other": async (s) => {
    const { fake, a } = await twoPhones(s);
    await a.mark();
    await a.returning();
    await a.settled();
    await a.goes(54.102, 7.9);
    await a.mark(".touch .second");
    await a.says("person 2: in the water");
    await until("both marks are stored", () => fake.events.length === 2);
    assert.equal(fake.events[1].body.person, 2);
    await a.says("Steering to person 2");
    await a.settled();
    await a.tap("Person 1");
    await a.says("Steering to person 1");
    await a.says("mark 1,");
    await a.tap("More", ".touch");
    await a.tap("ABOARD", ".sheet");
    await a.tap("Well");
    await a.says("ing to person 1: aboard");
    await a.says("Person 2: in the water");
    assert.equal(await a.page.locator(".ring").count(), 1);
  },

  "scenario 32: a helper goes in: a new mark at the vessel, one fewer aboard": async (s) => {
    const { fake, a } = await twoPhones(s);
    await a.mark();
    await a.returning();
    await a.settled();
    await a.tap("More", ".touch");
    for (const n of [1, 2, 3]) {
      await a.tap("One more aboard");
      await a.says(`Head-count: ${n} aboard, 1 outside the rail`);
    }
    await a.tap("Back to the ring");
    await a.tap("ALONGSIDE");
    await a.says("Alongside is not aboard");
    await a.mark(".touch .second");
    await until("mark and count are stored", () => fake.events.at(-1).kind === "head_count" && fake.events.at(-1).body.aboard === 2);
    assert.equal(fake.events.filter((e) => e.kind === "marked").length, 2);
    await a.says("Person 1: alongside");
    await a.says("erson 2: in the water");
    await a.settled();
    await a.tap("More", ".touch");
    await a.says("Head-count: 2 aboard, 2 outside the rail");
  },

  "seen, lost, undone: everything but time can be taken back, and stays in the log": async (s) => {
    const { fake, a, b } = await twoPhones(s);
    await a.mark();
    await b.returning();
    await a.settled();
    await a.tap("I SEE THEM");
    await b.says("LOST SIGHT");
    await a.tap("Undo: Seen");
    await b.says("I SEE THEM");
    assert.deepEqual(fake.events.map((e) => e.kind), ["marked", "seen", "undone"]);
    assert.ok(fake.events[1].body.observer, "a sighting says from where");
    await a.tap("More", ".touch");
    await a.tap("People and log");
    await a.says("taken back");
  },

  "scenario 3: fell 30 s earlier: the mark moves back along the track, the press is kept": async (s) => {
    const { fake, a } = await twoPhones(s);
    // North at 8 kn (4.12 m/s), a fix each second, sent as the vessel's.
    const mPerDeg = 111_319; // near enough to draw a track; the check below is against the engine's own words
    const now = Date.now();
    for (let i = 60; i >= 0; i--) {
      const lat = 54.1 - (i * 4.1156) / mPerDeg;
      fake.send({ t: "fix", position: { lat, lon: 7.9 }, at: new Date(now - i * 1000).toISOString(), age_s: i, sog_kn: 8, cog_deg: 0, source: "vessel", error_m: 5 });
    }
    await a.says("from the vessel");
    await a.mark();
    await a.returning();
    await a.settled();
    await a.tap("Fell earlier");
    await a.tap("30 s before the press");
    await until("the move is stored", () => fake.events.length === 2);
    const { body } = fake.events[1];
    assert.equal(body.back_s, 30);
    assert.equal(Date.parse(fake.events[0].at) - Date.parse(body.fell_at), 30_000);
    const movedM = (fake.events[0].body.position.lat - body.position.lat) * mPerDeg;
    assert(movedM > 110 && movedM < 135, `moved ${movedM} m back, 30 s at 8 kn are 123 m`);
    assert.equal(body.source, "track");
    await a.says("moved back");
    await a.tap("Undo: Mark moved");
    await a.saysNot("moved back");
  },

  "a position typed badly is refused with the form expected, one typed well is underlined": async (s) => {
    const { fake, a } = await twoPhones(s);
    await a.mark();
    await a.returning();
    await a.settled();
    await a.tap("Fell earlier");
    const where = a.page.locator(".field", { hasText: "At this position" });
    await where.locator("input").fill("somewhere north");
    await where.locator("button").tap();
    await a.page.waitForSelector(".trouble");
    assert.match(await a.page.locator(".trouble").innerText(), /54/);
    assert.equal(fake.events.length, 1);
    await where.locator("input").fill("54 06.00N 007 54.00E");
    await where.locator("button").tap();
    await until("it is stored", () => fake.events.length === 2);
    assert.deepEqual(fake.events[1].body.position, { lat: 54.1, lon: 7.9 });
    await a.page.waitForSelector(".typed");
  },

  "standing down takes a hold; a touch does not do it": async (s) => {
    const { fake, a } = await twoPhones(s);
    await a.mark();
    await a.returning();
    await a.settled();
    await a.tap("More", ".touch");
    await a.tap("Stand down", ".sheet");
    const hold = a.page.locator(".hold");
    await hold.scrollIntoViewIfNeeded();
    await hold.tap();
    const box = await hold.boundingBox();
    await a.touch(box.x + 50, box.y + 60, 700);
    assert.equal(fake.events.length, 1);
    await a.touch(box.x + 50, box.y + 60, 1700);
    await until("it is stored", () => fake.events.length === 2);
    assert.equal(fake.events[1].kind, "stood_down");
    await a.page.waitForSelector(".lines");
  },
};
