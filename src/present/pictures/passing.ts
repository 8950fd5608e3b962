import type { PassingPicture } from "../../results/index.ts";
import { percentText } from "../numbers.ts";
import { inLines, type Specification } from "./axes.ts";
import { hueOf, ink, labelSize } from "./look.ts";
import { widest } from "./text-width.ts";

interface Box {
  readonly name: string;
  readonly x: number;
  readonly y: number;
  readonly halfWidth: number;
  readonly halfHeight: number;
  readonly text: string;
}

/** Where a straight line from the middle of a box towards a point leaves the box. */
function edge(box: Box, towards: { readonly x: number; readonly y: number }, gap: number) {
  const dx = towards.x - box.x;
  const dy = towards.y - box.y;
  if (dx === 0 && dy === 0) return { x: box.x, y: box.y - box.halfHeight };
  const scale = Math.min(
    dx === 0 ? Number.POSITIVE_INFINITY : (box.halfWidth + gap) / Math.abs(dx),
    dy === 0 ? Number.POSITIVE_INFINITY : (box.halfHeight + gap) / Math.abs(dy),
  );
  return { x: box.x + dx * scale, y: box.y + dy * scale };
}

/** The error at each comparison before anything is tested, and where it goes once a comparison is shown. */
export function passingSpecification(picture: PassingPicture, width: number): Specification {
  const families = [...new Set(picture.nodes.map((node) => node.family))];
  const inner = width - 16;
  const sizeOf = (family: string) => picture.nodes.filter((node) => node.family === family).length;
  const circle = families.length === 1 && picture.nodes.length > 2 && picture.passes.some((pass) => pass.gate !== true);
  const perRow = circle ? 3 : Math.max(1, Math.min(Math.max(...families.map(sizeOf)), Math.floor(inner / 110)));
  const boxWidth = Math.min(170, inner / perRow - (circle ? 26 : 52));
  const textOf = (node: PassingPicture["nodes"][number]) => {
    const ending = node.rejected === null ? "" : node.rejected ? "\nshown" : "\nnot shown";
    return `${inLines(node.name, boxWidth - 12)}\n${percentText(Number(node.weight.toPrecision(4)))}${ending}`;
  };
  const texts = picture.nodes.map(textOf);
  const halfHeight = (13 * Math.max(...texts.map((text) => text.split("\n").length)) + 12) / 2;
  const boxes = new Map<string, Box>();
  const labels: { x: number; y: number; text: string }[] = [];
  const bands = new Map<string, { top: number; bottom: number }>();
  let height = 8;
  if (circle) {
    const count = picture.nodes.length;
    const radiusX = inner / 2 - boxWidth / 2;
    const radiusY = Math.max(90, halfHeight * 2.4, 26 * count);
    for (const [index, node] of picture.nodes.entries()) {
      const turn = -Math.PI / 2 + (2 * Math.PI * index) / count;
      boxes.set(node.name, {
        name: node.name,
        x: width / 2 + radiusX * Math.cos(turn),
        y: 8 + halfHeight + radiusY * (1 + Math.sin(turn)),
        halfWidth: boxWidth / 2,
        halfHeight,
        text: texts[index]!,
      });
    }
    height = Math.max(...[...boxes.values()].map((box) => box.y)) + halfHeight + 8;
  } else {
    for (const family of families) {
      const top = height;
      if (families.length > 1) {
        labels.push({ x: 8, y: height + 8, text: inLines(`family ${family}`, inner) });
        height += 24;
      }
      const own = picture.nodes.filter((node) => node.family === family);
      for (let start = 0; start < own.length; start += perRow) {
        const row = own.slice(start, start + perRow);
        for (const [index, node] of row.entries())
          boxes.set(node.name, {
            name: node.name,
            x: 8 + ((index + 0.5) / row.length) * inner,
            y: height + halfHeight,
            halfWidth: boxWidth / 2,
            halfHeight,
            text: texts[picture.nodes.indexOf(node)]!,
          });
        height += 2 * halfHeight + 40;
      }
      bands.set(family, { top, bottom: height - 36 });
      height += families.length > 1 ? 14 : 0;
    }
    height -= 30;
  }
  const curves: { arrow: number; step: number; x: number; y: number }[] = [];
  const heads: { x: number; y: number; angle: number }[] = [];
  const shares: { x: number; y: number; text: string }[] = [];
  const bandBox = (family: string, side: "top" | "bottom"): Box | undefined => {
    const band = bands.get(family);
    if (band === undefined) return undefined;
    return { name: family, x: width / 2, y: band[side], halfWidth: 0, halfHeight: 0, text: "" };
  };
  for (const [arrow, pass] of picture.passes.entries()) {
    if (pass.share <= 0) continue;
    const from = pass.gate === true ? bandBox(pass.from, "bottom") : boxes.get(pass.from);
    const to = pass.gate === true ? bandBox(pass.to, "top") : boxes.get(pass.to);
    if (from === undefined || to === undefined || from === to) continue;
    // Each arrow bends to its own right, so that two that run against each other stay apart.
    const distance = Math.hypot(to.x - from.x, to.y - from.y) || 1;
    const beside = from.y === to.y && distance < (1.2 * inner) / perRow;
    const answered = picture.passes.some(
      (other) => other.from === pass.to && other.to === pass.from && other.share > 0,
    );
    const straight = pass.gate === true || (!circle && beside && !answered);
    const bend = straight ? 0 : Math.min(34, 0.16 * distance) + (circle ? 0 : 10);
    const middle = {
      x: (from.x + to.x) / 2 - ((to.y - from.y) / distance) * bend,
      y: (from.y + to.y) / 2 + ((to.x - from.x) / distance) * bend,
    };
    const start = edge(from, middle, 0);
    const end = edge(to, middle, 5);
    const place = (share: number) => ({
      x: (1 - share) ** 2 * start.x + 2 * share * (1 - share) * middle.x + share ** 2 * end.x,
      y: (1 - share) ** 2 * start.y + 2 * share * (1 - share) * middle.y + share ** 2 * end.y,
    });
    for (let step = 0; step <= 16; step++) curves.push({ arrow, step, ...place(step / 16) });
    const before = place(0.96);
    heads.push({ ...end, angle: (Math.atan2(end.y - before.y, end.x - before.x) * 180) / Math.PI + 90 });
    const text =
      pass.gate === true ? "once all are shown, the whole error" : percentText(Number(pass.share.toPrecision(3)));
    const spot = place(straight ? 0.5 : 0.36);
    shares.push(
      pass.gate === true
        ? { x: spot.x + 10, y: spot.y, text: inLines(text, inner / 2 - 20) }
        : {
            x: spot.x - ((to.y - from.y) / distance) * 12 - widest([text], labelSize) / 2,
            y: spot.y + (straight ? -9 : ((to.x - from.x) / distance) * 10),
            text,
          },
    );
  }
  const nodes = picture.nodes.map((node) => {
    const box = boxes.get(node.name)!;
    return {
      name: node.name,
      left: box.x - box.halfWidth,
      right: box.x + box.halfWidth,
      top: box.y - box.halfHeight,
      bottom: box.y + box.halfHeight,
      x: box.x,
      y: box.y - 6.5 * (box.text.split("\n").length - 1),
      text: box.text,
      rejected: node.rejected === true,
      family: families.indexOf(node.family),
    };
  });
  const x = (field: string): Specification => ({
    field,
    type: "quantitative",
    axis: null,
    scale: { domain: [0, width], nice: false, zero: false },
  });
  const y = (field: string): Specification => ({
    field,
    type: "quantitative",
    axis: null,
    scale: { domain: [height, 0], nice: false, zero: false },
  });
  return {
    width,
    height,
    padding: 0,
    layer: [
      {
        data: { values: curves },
        mark: { type: "line", strokeWidth: 1.4, color: ink },
        encoding: {
          x: x("x"),
          y: y("y"),
          detail: { field: "arrow", type: "nominal" },
          order: { field: "step", type: "quantitative" },
        },
      },
      {
        data: { values: heads },
        mark: { type: "point", shape: "triangle", filled: true, size: 45, opacity: 1, color: ink },
        encoding: { x: x("x"), y: y("y"), angle: { field: "angle", type: "quantitative", scale: null } },
      },
      {
        data: { values: nodes },
        mark: { type: "rect", cornerRadius: 5, fillOpacity: 0, strokeWidth: 2, stroke: hueOf(0) },
        encoding: {
          x: x("left"),
          x2: { field: "right" },
          y: y("top"),
          y2: { field: "bottom" },
          strokeWidth: { condition: { test: "datum.rejected", value: 3.5 }, value: 1.4 },
          stroke: {
            field: "family",
            type: "nominal",
            legend: null,
            scale: { domain: families.map((_, index) => index), range: families.map((_, index) => hueOf(index)) },
          },
        },
      },
      {
        data: { values: nodes },
        mark: { type: "text", baseline: "middle", align: "center", fontSize: labelSize, lineHeight: 13 },
        encoding: { x: x("x"), y: y("y"), text: { field: "text" } },
      },
      {
        data: { values: shares },
        mark: { type: "text", baseline: "middle", align: "left", fontSize: labelSize },
        encoding: { x: x("x"), y: y("y"), text: { field: "text" } },
      },
      {
        data: { values: labels },
        mark: { type: "text", baseline: "middle", align: "left", fontSize: labelSize },
        encoding: { x: x("x"), y: y("y"), text: { field: "text" } },
      },
    ],
  };
}
