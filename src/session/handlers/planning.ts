import type { StatementOf } from "../../../grammar/index.ts";
import type { PowerPicture } from "../../results/index.ts";
import type { Context, Handler } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import type { Study } from "../study.ts";

function notYet(what: string): never {
  throw new SessionProblem(
    "not-available-yet",
    `${what} is not available yet in this version.`,
    "Update Meanwise when it is.",
  );
}

export async function powerPicture(
  _statement: StatementOf<"draw">,
  _study: Study,
  _context: Context,
): Promise<PowerPicture> {
  return notYet("draw power");
}

const unavailable = (what: string) => () => notYet(what);

export const planningHandlers: {
  readonly size: Handler<"size">;
  readonly power: Handler<"power">;
  readonly detectable: Handler<"detectable">;
  readonly rehearse: Handler<"rehearse">;
  readonly calibrate: Handler<"calibrate">;
} = {
  size: unavailable("size"),
  power: unavailable("power"),
  detectable: unavailable("detectable"),
  rehearse: unavailable("rehearse"),
  calibrate: unavailable("calibrate"),
};
