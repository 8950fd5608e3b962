import type { Statement } from "../../../grammar/index.ts";
import type { Handler } from "../handler.ts";
import { analysisHandlers } from "./analyses.ts";
import { dataHandlers } from "./data.ts";
import { declarationHandlers } from "./declarations.ts";
import { planningHandlers } from "./planning.ts";
import { recordHandlers } from "./record.ts";
import { settingsHandlers } from "./settings.ts";

/** One handler for each kind of statement: a missing or surplus one does not compile. */
export const handlers: { readonly [K in Statement["kind"]]: Handler<K> } = {
  ...declarationHandlers,
  ...planningHandlers,
  ...dataHandlers,
  ...analysisHandlers,
  ...recordHandlers,
  ...settingsHandlers,
};
