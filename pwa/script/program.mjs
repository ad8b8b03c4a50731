// The real program, for the stories that play against it: wakeback serve
// --demo with a data folder of its own. WAKEBACK names it; else bin/wakeback.

import { spawn } from "node:child_process";
import { existsSync, mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";

const path = process.env.WAKEBACK ?? new URL("../../bin/wakeback", import.meta.url).pathname;

/** Whether the program is built. */
export const built = existsSync(path);

/** How long it may take to say its address: generous, a slow machine builds nothing here. */
const START_MS = 15_000;

export class Program {
  data = mkdtempSync(join(tmpdir(), "wakeback-story-"));
  said = "";

  /** Starts it and answers with its address. The port stays the same over restarts. */
  async start() {
    const listen = `127.0.0.1:${this.port ?? 0}`;
    this.child = spawn(path, ["serve", "--demo", "--data", this.data, "--listen", listen], { stdio: ["ignore", "pipe", "pipe"] });
    this.ended = new Promise((done) => this.child.once("exit", done));
    const url = await new Promise((ok, no) => {
      const late = setTimeout(() => no(new Error(`no address after ${START_MS} ms: ${this.said}`)), START_MS);
      const hear = (data) => {
        this.said += data;
        const found = /(http:\/\/[\w.]+:(\d+))/.exec(this.said);
        if (!found) return;
        clearTimeout(late);
        this.port = Number(found[2]);
        ok(`${found[1]}/`);
      };
      this.child.stdout.on("data", hear);
      this.child.stderr.on("data", hear);
      this.child.once("exit", (code) => no(new Error(`the program ended with ${code}: ${this.said}`)));
    });
    this.said = "";
    return url;
  }

  /** As a power cut would. */
  async kill() {
    this.child.kill("SIGKILL");
    await this.ended;
  }

  async stop() {
    this.child?.kill("SIGTERM");
    await this.ended;
    rmSync(this.data, { recursive: true, force: true });
  }
}
