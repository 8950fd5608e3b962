import { describe, expect, it } from "vitest";
import { startKernel } from "./running.ts";
describe("x", () => {
  it("starts", { timeout: 60000 }, async () => {
    const t0 = Date.now();
    const kernel = await startKernel();
    console.log("ready", Date.now() - t0);
    try {
      for (const code of ["show settings", "show settings", 'study "a"', "compare nothing"]) {
        const t = Date.now();
        const got = await kernel.client.request("shell", "execute_request", { code, store_history: true });
        console.log(code, Date.now() - t, JSON.stringify(got.reply.content), got.outputs.map((m) => m.type + JSON.stringify(m.content).slice(0, 300)));
      }
    } finally { await kernel.stop(); console.log(kernel.said()); }
  });
});
