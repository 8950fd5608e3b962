import { existsSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { createRequire } from "node:module";
import { Resvg } from "@resvg/resvg-js";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { svgToPng } from "../../../src/cli/svg-to-png.ts";
import { pictureFile } from "../../../src/present/index.ts";
import { rangeOf, sideBySide, ticksAcross } from "../../../src/present/pictures/axes.ts";
import { describePicture, drawPicture, inlineSvg, pictureCaption } from "../../../src/present/pictures/index.ts";
import { columnWidths, hues, ink } from "../../../src/present/pictures/look.ts";
import { specificationOf } from "../../../src/present/pictures/specifications.ts";
import { textWidth, wrappedLabel } from "../../../src/present/pictures/text-width.ts";
import type { Picture } from "../../../src/results/index.ts";
import * as glove from "../glove.ts";

const pictures: Readonly<Record<string, Picture>> = {
  means: glove.meansPicture,
  profiles: glove.profilesPicture,
  distributions: glove.distributionsPicture,
  residuals: glove.residualsPicture,
  planned: glove.comparisonsPictureOf(glove.primary),
  exploratory: glove.comparisonsPictureOf(glove.explored),
  equivalence: glove.comparisonsPictureOf(glove.equivalence),
  ratios: glove.comparisonsPictureOf(glove.ratios),
  power: glove.powerPicture,
  passing: glove.passingPicture,
  gate: glove.gatePicture,
  calibration: {
    picture: "calibration",
    response: glove.seconds,
    state: "planned",
    notes: [],
    calibration: glove.calibration,
  },
};

const longNames = [
  "Donaudampfschifffahrtsgesellschaftskapit\u00e4nshandschuhe und S\u00f6hne",
  "\u0398\u03b5\u03c1\u03bc\u03bf\u03bc\u03bf\u03bd\u03c9\u03c4\u03b9\u03ba\u03cc \u03b3\u03ac\u03bd\u03c4\u03b9 \u03b5\u03c1\u03b3\u03b1\u03c3\u03af\u03b1\u03c2",
  "\u0422\u0435\u043f\u043b\u043e\u0438\u0437\u043e\u043b\u044f\u0446\u0438\u043e\u043d\u043d\u044b\u0435 \u043f\u0435\u0440\u0447\u0430\u0442\u043a\u0438 \u0434\u043b\u044f \u0441\u0431\u043e\u0440\u043a\u0438",
  "a",
];
const renamed = <Value>(value: Value): Value => {
  const change = (part: unknown): unknown => {
    if (typeof part === "string")
      return glove.gloves.reduce<string>(
        (text, name, index) =>
          text
            .split(" ")
            .map((word) => (word === name ? longNames[index]! : word))
            .join(" "),
        part,
      );
    if (Array.isArray(part)) return part.map(change);
    if (typeof part === "object" && part !== null)
      return Object.fromEntries(Object.entries(part).map(([key, each]) => [key, change(each)]));
    return part;
  };
  return change(value) as Value;
};

const fontFiles = [createRequire(import.meta.url).resolve("dejavu-fonts-ttf/ttf/DejaVuSans.ttf")];
const boxOf = (svg: string) =>
  new Resvg(svg, { font: { loadSystemFonts: false, fontFiles, defaultFontFamily: "DejaVu Sans" } }).getBBox()!;

const luminance = (hex: string): number => {
  const [red, green, blue] = [1, 3, 5].map((at) => {
    const part = Number.parseInt(hex.slice(at, at + 2), 16) / 255;
    return part <= 0.03928 ? part / 12.92 : ((part + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * red! + 0.7152 * green! + 0.0722 * blue!;
};
const contrast = (one: string, other: string): number => {
  const [low, high] = [luminance(one), luminance(other)].sort((left, right) => left - right);
  return (high! + 0.05) / (low! + 0.05);
};

describe("widths of text", () => {
  it("are the font's own advances, freshly generated", async () => {
    const generator = "./generate-text-widths.mjs";
    const { source } = (await import(generator)) as { source: string };
    const squeezed = (text: string) => text.replace(/\s/g, "").replace(/,\]/g, "]");
    expect(
      squeezed(readFileSync(new URL("../../../src/present/pictures/font-widths.ts", import.meta.url), "utf8")),
    ).toBe(squeezed(source));
  });

  it("agree with a second route, the box of the drawn text, up to the room beside the first and last letter", () => {
    for (const text of [
      "nitrile - bare",
      "\u0398\u03b5\u03c1\u03bc\u03bf\u03bc\u03bf\u03bd\u03c9",
      "\u0422\u0435\u043f\u043b\u043e",
      "0.123 \u2212 4.5 \u03b7\u00b2",
    ]) {
      const svg = `<svg xmlns="http://www.w3.org/2000/svg" width="900" height="60"><text x="10" y="40" font-family="DejaVu Sans" font-size="20">${text}</text></svg>`;
      const { width } = boxOf(svg);
      expect(Math.abs(textWidth(text, 20) - width)).toBeLessThan(6);
    }
  });

  it("wrap any label into lines that fit, losing nothing but blanks (property)", () => {
    fc.assert(
      fc.property(fc.string({ unit: "grapheme", maxLength: 60 }), fc.integer({ min: 30, max: 200 }), (text, limit) => {
        const lines = wrappedLabel(text, 11, limit);
        const bare = (part: string) => part.replace(/[ \t\r\n]/g, "").trim();
        expect(bare(lines.join(""))).toBe(bare(text));
        for (const line of lines)
          if ([...new Intl.Segmenter("en").segment(line)].length > 1)
            expect(textWidth(line, 11)).toBeLessThanOrEqual(limit);
      }),
    );
  });
});

describe("axes", () => {
  it("carry round numbers inside their range, about as many as asked for (property)", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e6, max: 1e6, noNaN: true }),
        fc.double({ min: 1e-3, max: 1e6, noNaN: true }),
        fc.integer({ min: 3, max: 8 }),
        (low, span, about) => {
          const { values, labels } = ticksAcross(low, low + span, about);
          expect(values.length).toBeGreaterThanOrEqual(1);
          expect(values.length).toBeLessThanOrEqual(about + 1);
          expect(new Set(labels).size).toBe(values.length);
          for (const value of values) {
            expect(value).toBeGreaterThanOrEqual(low - 1e-6 * span - 1e-9);
            expect(value).toBeLessThanOrEqual(low + span * (1 + 1e-6) + 1e-9);
          }
        },
      ),
    );
  });

  it("label powers of ten on wide log ranges and round numbers on narrow ones", () => {
    expect(ticksAcross(0.5, 2000, 5, true).labels).toEqual(["1", "3", "10", "30", "100", "300", "1000"]);
    expect(ticksAcross(0.6, 1.3, 4, true).labels).toEqual(["0.6", "0.8", "1.0", "1.2"]);
  });

  it("hold every value, also where all are alike or none is known", () => {
    for (const values of [
      [3, 3, 3],
      [null, null],
      [-1e-9, 1e-9],
      [5, 1e8],
    ]) {
      const { domain } = rangeOf(values, glove.seconds, 5);
      expect(domain[0]).toBeLessThan(domain[1]);
      for (const value of values) if (value !== null) expect(value >= domain[0] && value <= domain[1]).toBe(true);
    }
  });

  it("set equal values beside each other, symmetric about the middle", () => {
    expect(sideBySide([1, 1, 1], 0.5, 1, 0.2)).toEqual([-0.2, 0, 0.2]);
    expect(Math.max(...sideBySide(Array<number>(500).fill(2), 0.5, 0.3, 0.2))).toBeCloseTo(0.3);
  });
});

describe("the look", () => {
  it("keeps every hue and the ink at 3 to 1 or more against white and near-black (WCAG 2, 1.4.11), text at 4 to 1", () => {
    for (const colour of [...hues, ink])
      for (const ground of ["#ffffff", "#14191b"]) expect(contrast(colour, ground)).toBeGreaterThan(3);
    for (const ground of ["#ffffff", "#14191b"]) expect(contrast(ink, ground)).toBeGreaterThan(4);
  });

  it("keeps neighbouring hues apart in grey by their lightness", () => {
    const lightness = (hex: string) => 116 * Math.cbrt(luminance(hex)) - 16;
    for (let index = 1; index < hues.length; index++)
      expect(Math.abs(lightness(hues[index]!) - lightness(hues[index - 1]!))).toBeGreaterThan(5);
  });

  it("keeps the first four hues apart for people who lack a kind of cone (Vienot, Brettel & Mollon 1999; distances in Oklab; both recalled)", () => {
    const linear = (hex: string) => [1, 3, 5].map((at) => (Number.parseInt(hex.slice(at, at + 2), 16) / 255) ** 2.2);
    const times = (matrix: readonly (readonly number[])[], vector: readonly number[]) =>
      matrix.map((row) => row.reduce((sum, weight, index) => sum + weight * vector[index]!, 0));
    const cones = [
      [0.4122214708, 0.5363325363, 0.0514459929],
      [0.2119034982, 0.6806995451, 0.1073969566],
      [0.0883024619, 0.2817188376, 0.6299787005],
    ];
    const opponent = [
      [0.2104542553, 0.793617785, -0.0040720468],
      [1.9779984951, -2.428592205, 0.4505937099],
      [0.0259040371, 0.7827717662, -0.808675766],
    ];
    const perceived = (colour: readonly number[]) =>
      times(
        opponent,
        times(cones, colour).map((part) => Math.cbrt(Math.max(0, part))),
      );
    const eyes = [
      [
        [1, 0, 0],
        [0, 1, 0],
        [0, 0, 1],
      ],
      [
        [0.11238, 0.88762, 0],
        [0.11238, 0.88762, 0],
        [0.00401, -0.00401, 1],
      ],
      [
        [0.29275, 0.70725, 0],
        [0.29275, 0.70725, 0],
        [-0.02234, 0.02234, 1],
      ],
    ];
    for (const eye of eyes) {
      const seen = hues.slice(0, 4).map((hex) => perceived(times(eye, linear(hex))));
      for (let one = 0; one < seen.length; one++)
        for (let other = 0; other < one; other++)
          expect(Math.hypot(...seen[one]!.map((part, index) => part - seen[other]![index]!))).toBeGreaterThan(0.1);
    }
  });
});

describe("pictures", () => {
  for (const [name, picture] of Object.entries(pictures))
    for (const width of [undefined, "one column", "two columns"] as const)
      it(`${name}: nothing is cut at ${width ?? "its own width"}, with short and with long names`, async () => {
        for (const drawn of [await drawPicture(picture, width), await drawPicture(renamed(picture), width)]) {
          const box = boxOf(drawn.svg);
          expect(box.x).toBeGreaterThanOrEqual(-1);
          expect(box.y).toBeGreaterThanOrEqual(-1);
          expect(box.x + box.width).toBeLessThanOrEqual(drawn.width + 1);
          expect(box.y + box.height).toBeLessThanOrEqual(drawn.height + 1);
          expect(drawn.svg).not.toContain("\u2026");
          if (width !== undefined) expect(drawn.width).toBeLessThanOrEqual(columnWidths[width] + 20);
        }
      });

  it("compile without a warning of the drawing library", async () => {
    const { compile } = await import("vega-lite");
    for (const [name, picture] of Object.entries(pictures)) {
      const warnings: unknown[] = [];
      const take = (...words: unknown[]) => {
        warnings.push(words);
        return listen;
      };
      const listen = { level: () => listen, warn: take, info: () => listen, debug: () => listen, error: take };
      compile(specificationOf(picture) as never, { logger: listen as never });
      expect(warnings, name).toEqual([]);
    }
  });

  it("break a subject's line where a value is missing, and keep a value that stands alone", async () => {
    const broken = {
      ...glove.profilesPicture,
      lines: [
        { subject: "o1", group: null, values: [40, null, 45, 50] },
        { subject: "o2", group: null, values: [null, 44, null, 48] },
      ],
    };
    const { svg } = await drawPicture(broken);
    const parts =
      /class="mark-group role-scope layer_0_pathgroup"[\s\S]*?(?=<g class="mark-symbol role-mark layer_1_marks)/.exec(
        svg,
      )![0];
    const drawn = [...parts.matchAll(/<path[^>]* d="(M[^"]*)"[^>]*stroke="#/g)].map((found) => found[1]!);
    expect(drawn.filter((path) => path.includes("L"))).toHaveLength(1);
    const alone = /class="mark-symbol role-mark layer_1_marks"[^>]*>([\s\S]*?)<\/g>/.exec(svg)![1]!;
    expect(alone.match(/<path/g)).toHaveLength(3);
  });

  it("write every level's name whole", async () => {
    for (const picture of [glove.meansPicture, glove.distributionsPicture, glove.profilesPicture]) {
      const { svg } = await drawPicture(renamed(picture), "one column");
      const text = svg
        .replace(/<title[\s\S]*?<\/desc>/, "")
        .replace(/<[^>]*>/g, "")
        .replace(/\s/g, "");
      for (const name of longNames) expect(text).toContain(name.replace(/\s/g, ""));
    }
  });

  it("keep ids apart between pictures and between places of one picture, and every reference finds its target", async () => {
    const drawn = await Promise.all(Object.values(pictures).map((picture) => drawPicture(picture)));
    const ids = (svg: string) => [...svg.matchAll(/\bid="([^"]+)"/g)].map((found) => found[1]!);
    const all = [...drawn.map((each) => each.svg), inlineSvg(drawn[0]!, "1"), inlineSvg(drawn[0]!, "2")];
    expect(new Set(all.flatMap(ids)).size).toBe(all.flatMap(ids).length);
    for (const svg of all)
      for (const found of svg.matchAll(/url\(#([^)]+)\)|(?:href|aria-labelledby|aria-describedby)="#?([^"]+)"/g))
        expect(ids(svg)).toContain(found[1] ?? found[2]);
  });

  it("come out the same however often and in whatever company they are drawn", async () => {
    const first = (await drawPicture(glove.meansPicture)).svg;
    await drawPicture(glove.passingPicture);
    const [second] = await Promise.all([drawPicture(glove.meansPicture), drawPicture(glove.powerPicture)]);
    expect(second.svg).toBe(first);
  });

  it("tell their state by shape and word, inside the picture and in the caption", async () => {
    for (const [state, mark] of [
      ["planned", "\u25a0"],
      ["declared", "\u25b2"],
      ["exploratory", "\u25cb"],
      ["rehearsal", "\u25c7"],
    ] as const)
      for (const picture of [glove.meansPicture, glove.comparisonsPictureOf(glove.primary)]) {
        const marked = { ...picture, state } as Picture;
        expect((await drawPicture(marked)).svg.replace(/<title[\s\S]*?<\/title>/, "")).toContain(
          `>${mark}\u00a0${state}<`,
        );
        expect(pictureCaption(marked)).toContain(`${mark}\u00a0${state}`);
      }
  });

  it("draw exploratory intervals broken and planned ones whole", async () => {
    const dashes = (svg: string) => (svg.match(/stroke-dasharray="5,3"/g) ?? []).length;
    expect(dashes((await drawPicture(glove.comparisonsPictureOf(glove.primary))).svg)).toBe(0);
    expect(dashes((await drawPicture(glove.comparisonsPictureOf(glove.explored))).svg)).toBe(6);
  });

  it("have a title, a description in words and a role for screen readers", async () => {
    for (const picture of Object.values(pictures)) {
      const { svg } = await drawPicture(picture);
      expect(svg).toMatch(/^<svg[^>]* role="img"[^>]*><title /);
      expect(describePicture(picture).length).toBeGreaterThan(20);
      expect(describePicture(picture)).not.toMatch(/undefined|NaN|null/);
    }
  });

  it("put estimates where their numbers say: positions are linear in the estimates", async () => {
    const { svg } = await drawPicture(glove.comparisonsPictureOf(glove.explored));
    const marks = /class="mark-symbol role-mark layer_5_marks"[^>]*>([\s\S]*?)<\/g>/.exec(svg)![1]!;
    const places = [...marks.matchAll(/translate\(([-\d.]+),/g)].map((found) => Number(found[1]));
    const estimates = glove.explored.rows.map((row) => row.estimate);
    const slope = (places[2]! - places[0]!) / (estimates[2]! - estimates[0]!);
    for (const [index, estimate] of estimates.entries())
      expect(places[index]!).toBeCloseTo(places[0]! + slope * (estimate - estimates[0]!), 6);
  });

  it("give a response on log scale back on its own scale, on a log axis", () => {
    const specification = JSON.stringify(specificationOf(glove.comparisonsPictureOf(glove.ratios)));
    expect(specification).toContain('"estimate":0.62');
    expect(specification).toContain('"type":"log"');
    expect(specification).toContain("ratio of turbidity");
  });

  it("leave an open end open, with an arrow at the edge", async () => {
    const oneSided = {
      ...glove.primary,
      sides: "upper" as const,
      rows: glove.primary.rows.map((row) => ({ ...row, upper: null })),
    };
    const { svg } = await drawPicture(glove.comparisonsPictureOf(oneSided));
    expect(svg.match(/rotate\(90\)/g)).toHaveLength(3);
  });

  it("are exported for white paper as SVG and PNG", async () => {
    const svg = new TextDecoder().decode((await pictureFile(glove.meansPicture, "svg", { svgToPng }))!);
    expect(svg).toMatch(/^<svg/);
    expect(svg).toContain('fill="#ffffff"');
    expect(svg).not.toContain(ink);
    const png = (await pictureFile(glove.meansPicture, "png", { svgToPng }, "one column"))!;
    expect([...png.slice(1, 4)]).toEqual([0x50, 0x4e, 0x47]);
    expect(new DataView(png.buffer, png.byteOffset).getUint32(16)).toBeGreaterThanOrEqual(1003);
  });
});

/**
 * Pictures as they were looked at. Written anew with MEANWISE_WRITE_GOLDENS=1; compared with a small tolerance, since renderers smooth edges
 * a little differently from one version to the next.
 */
describe("rendered pictures", () => {
  const folder = new URL("../goldens/", import.meta.url);
  const pixels = (svg: string) => new Resvg(svg, { font: { loadSystemFonts: false } }).render();
  for (const name of ["means", "planned", "exploratory", "passing", "power", "ratios"] as const)
    it(`${name} looks as it did`, async () => {
      const drawn = await drawPicture(pictures[name]!, "one column");
      const png = (await svgToPng(drawn.svg, Math.round(drawn.width)))!;
      const file = new URL(`${name}.png`, folder);
      if (process.env.MEANWISE_WRITE_GOLDENS === "1") {
        mkdirSync(folder, { recursive: true });
        writeFileSync(file, png);
      }
      expect(existsSync(file), "golden picture").toBe(true);
      const size = {
        width: Math.round(drawn.width),
        height: Math.round((drawn.height * Math.round(drawn.width)) / drawn.width),
      };
      const asPixels = (bytes: Uint8Array) =>
        pixels(
          `<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" width="${size.width}" height="${size.height}"><image width="${size.width}" height="${size.height}" preserveAspectRatio="none" xlink:href="data:image/png;base64,${Buffer.from(bytes).toString("base64")}"/></svg>`,
        ).pixels;
      const [now, then] = [asPixels(png), asPixels(readFileSync(file))];
      expect(now.length).toBe(then.length);
      let total = 0;
      let far = 0;
      for (let index = 0; index < now.length; index++) {
        const difference = Math.abs(now[index]! - then[index]!);
        total += difference;
        if (difference > 48) far++;
      }
      expect(total / now.length).toBeLessThan(0.6);
      expect(far / now.length).toBeLessThan(0.004);
      expect(now.some((value) => value !== 0)).toBe(true);
    });
});
