// How is the field drawn, moved and sampled?

import * as three from 'three';
import { LineMaterial } from 'three/addons/lines/LineMaterial.js';
import { LineSegments2 } from 'three/addons/lines/LineSegments2.js';
import { LineSegmentsGeometry } from 'three/addons/lines/LineSegmentsGeometry.js';

import { MAP_ENTRIES, PALETTES, bytesOf, cyclicMap, divergingMap, sequentialMap } from '../../src/results/colours.ts';
import type { Theme } from '../../src/results/colours.ts';
import type { RunRecord } from '../../src/results/format.ts';
import { FIELD_FRAGMENT, FIELD_VERTEX, HATCH_FRAGMENT } from './shaders.ts';
import type { View } from './state.ts';

/** Free room for the rim circle, CSS pixels from the window's edges; the picture fades out over the rest. */
export interface Margins {
  readonly left: number;
  readonly top: number;
  readonly right: number;
  readonly bottom: number;
}

export interface Picture {
  readonly setField: (values: Float32Array) => void;
  readonly setLook: (look: { readonly view: View; readonly limit: number; readonly theme: Theme }) => void;
  readonly setPhase: (phase: number) => void;
  /** Adapts to the window; refits the rim unless the user has moved the picture. */
  readonly resize: (margins: Margins) => void;
  readonly panBy: (dx: number, dy: number) => void;
  readonly zoomAt: (px: number, py: number, factor: number) => void;
  /** The whole rim again. */
  readonly reset: () => void;
  /** Window pixel to device coordinates, and back. */
  readonly toDevice: (px: number, py: number) => [x: number, y: number];
  readonly toPixel: (x: number, y: number) => [px: number, py: number];
  /** CSS pixels per length unit. */
  readonly scale: () => number;
  readonly draw: () => void;
  /** Draws, then reads the colours (red, green, blue, alpha) at window pixels. */
  readonly sample: (pixels: readonly (readonly [px: number, py: number])[]) => number[][];
}

export interface PictureData {
  readonly record: RunRecord;
  readonly points: Float64Array;
  readonly triangles: Uint32Array;
  readonly regions: Int32Array;
  /** Closed polylines. */
  readonly outlines: readonly Float64Array[];
  /** [x0,y0,x1,y1] of each piece. */
  readonly walls: Float64Array;
}

const VIEW_NUMBER: Readonly<Record<View, number>> = { wave: 0, intensity: 1, phase: 2 };
const NEAREST = 0.2;
const CLOSEST = 2000;

export function createPicture(canvas: HTMLCanvasElement, data: PictureData): Picture {
  const { center, rimRadius } = data.record.mesh;
  const renderer = new three.WebGLRenderer({ canvas, antialias: true, alpha: true });
  renderer.setClearColor(0, 0);
  const camera = new three.OrthographicCamera(-1, 1, 1, -1, -1, 1);
  const scene = new three.Scene();
  const maps = createMaps();
  // Shared by the field and the hatch.
  const shared = {
    size: { value: new three.Vector2(1, 1) },
    quiet: { value: new three.Vector4() },
    ratio: { value: 1 },
    round: { value: data.record.display.enclosed ? 0 : 1 },
    origin: { value: new three.Vector2() },
    ground: { value: new three.Vector3() },
    ink: { value: new three.Vector3() },
  };
  const look = { map: { value: maps.light.wave }, view: { value: 0 }, limit: { value: 1 }, phase: { value: 0 } };

  const position = new three.BufferAttribute(normalised(data.points, center, rimRadius), 3);
  const values = new three.BufferAttribute(new Float32Array(data.points.length), 2);
  values.setUsage(three.DynamicDrawUsage);
  const field = triangleGeometry(position, values, data.triangles);
  const fieldMaterial = new three.RawShaderMaterial({
    glslVersion: three.GLSL3,
    vertexShader: FIELD_VERTEX,
    fragmentShader: FIELD_FRAGMENT,
    uniforms: { ...shared, ...look },
    depthTest: false,
    depthWrite: false,
  });
  scene.add(drawn(new three.Mesh(field, fieldMaterial), 0));
  const hatchMaterial = new three.RawShaderMaterial({
    glslVersion: three.GLSL3,
    vertexShader: FIELD_VERTEX,
    fragmentShader: HATCH_FRAGMENT,
    uniforms: shared,
    transparent: true,
    premultipliedAlpha: true,
    depthTest: false,
    depthWrite: false,
  });
  scene.add(drawn(new three.Mesh(triangleGeometry(position, values, activeTriangles(data)), hatchMaterial), 1));
  const outlineMaterial = new LineMaterial({ linewidth: 1.2, transparent: true, opacity: 0.8, depthTest: false });
  scene.add(drawn(new LineSegments2(outlineGeometry(data, center, rimRadius), outlineMaterial), 2));

  // The rim's center stands at window pixel (cx, cy), its radius is s pixels.
  const at = { cx: 0, cy: 0, s: 1, moved: false };
  const fit = { cx: 0, cy: 0, s: 1 };
  const size = { width: 1, height: 1 };

  const draw = (): void => {
    const { cx, cy, s } = at;
    camera.left = -cx / s;
    camera.right = (size.width - cx) / s;
    camera.top = cy / s;
    camera.bottom = (cy - size.height) / s;
    camera.updateProjectionMatrix();
    shared.origin.value.set(cx, size.height - cy);
    renderer.render(scene, camera);
  };

  return {
    setField(next) {
      (values.array as Float32Array).set(next);
      values.needsUpdate = true;
    },
    setLook({ view, limit, theme }) {
      const palette = PALETTES[theme];
      shared.ground.value.set(...unitColour(palette.ground));
      shared.ink.value.set(...unitColour(palette.ink));
      outlineMaterial.color.set(palette.ink);
      look.map.value = maps[theme][view];
      look.view.value = VIEW_NUMBER[view];
      look.limit.value = limit;
    },
    setPhase(phase) {
      look.phase.value = phase;
    },
    resize(margins) {
      const before = { ...fit };
      size.width = window.innerWidth;
      size.height = window.innerHeight;
      renderer.setPixelRatio(window.devicePixelRatio);
      renderer.setSize(size.width, size.height, false);
      shared.ratio.value = window.devicePixelRatio;
      shared.size.value.set(size.width, size.height);
      shared.quiet.value.set(margins.left, margins.top, margins.right, margins.bottom);
      const room = { x: size.width - margins.left - margins.right, y: size.height - margins.top - margins.bottom };
      fit.cx = margins.left + room.x / 2;
      fit.cy = margins.top + room.y / 2;
      fit.s = Math.max(20, Math.min(room.x, room.y) / 2);
      if (!at.moved) Object.assign(at, fit);
      else {
        at.cx += fit.cx - before.cx;
        at.cy += fit.cy - before.cy;
      }
    },
    panBy(dx, dy) {
      at.cx += dx;
      at.cy += dy;
      at.moved = true;
    },
    zoomAt(px, py, factor) {
      const s = Math.min(CLOSEST * fit.s, Math.max(NEAREST * fit.s, at.s * factor));
      at.cx = px + ((at.cx - px) * s) / at.s;
      at.cy = py + ((at.cy - py) * s) / at.s;
      at.s = s;
      at.moved = true;
    },
    reset() {
      Object.assign(at, fit, { moved: false });
    },
    toDevice: (px, py) => [
      center[0] + ((px - at.cx) / at.s) * rimRadius,
      center[1] - ((py - at.cy) / at.s) * rimRadius,
    ],
    toPixel: (x, y) => [at.cx + ((x - center[0]) / rimRadius) * at.s, at.cy - ((y - center[1]) / rimRadius) * at.s],
    scale: () => at.s / rimRadius,
    draw,
    sample(pixels) {
      draw();
      const gl = renderer.getContext();
      const ratio = window.devicePixelRatio;
      return pixels.map(([px, py]) => {
        const out = new Uint8Array(4);
        const [x, y] = [Math.floor(px * ratio), Math.floor((size.height - py) * ratio)];
        gl.readPixels(x, y, 1, 1, gl.RGBA, gl.UNSIGNED_BYTE, out);
        return [...out];
      });
    },
  };
}

function createMaps(): Readonly<Record<Theme, Readonly<Record<View, three.DataTexture>>>> {
  const all = (theme: Theme): Record<View, three.DataTexture> => ({
    wave: mapTexture(divergingMap(theme)),
    intensity: mapTexture(sequentialMap(theme)),
    phase: mapTexture(cyclicMap(theme)),
  });
  return { light: all('light'), dark: all('dark') };
}

function mapTexture(map: Uint8Array): three.DataTexture {
  const data = new Uint8Array(4 * MAP_ENTRIES);
  for (let i = 0; i < MAP_ENTRIES; i++) data.set([map[3 * i], map[3 * i + 1], map[3 * i + 2], 255], 4 * i);
  const texture = new three.DataTexture(data, MAP_ENTRIES, 1);
  texture.minFilter = texture.magFilter = three.LinearFilter;
  texture.needsUpdate = true;
  return texture;
}

/** Rim center to the origin, rim radius to 1: single precision then serves any length unit. */
function normalised(points: Float64Array, center: readonly [number, number], radius: number): Float32Array {
  const out = new Float32Array((points.length / 2) * 3);
  for (let i = 0; i < points.length / 2; i++) {
    out[3 * i] = (points[2 * i] - center[0]) / radius;
    out[3 * i + 1] = (points[2 * i + 1] - center[1]) / radius;
  }
  return out;
}

function triangleGeometry(
  position: three.BufferAttribute,
  values: three.BufferAttribute,
  triangles: Uint32Array,
): three.BufferGeometry {
  const geometry = new three.BufferGeometry();
  geometry.setAttribute('position', position);
  geometry.setAttribute('u', values);
  geometry.setIndex(new three.BufferAttribute(triangles, 1));
  return geometry;
}

function activeTriangles({ record, triangles, regions }: PictureData): Uint32Array {
  const active = record.device.bodies.map(({ pumpWeight }) => pumpWeight !== 0);
  const kept: number[] = [];
  regions.forEach((region, t) => {
    if (region >= 0 && active[region]) kept.push(triangles[3 * t], triangles[3 * t + 1], triangles[3 * t + 2]);
  });
  return Uint32Array.from(kept);
}

function outlineGeometry(
  { outlines, walls }: PictureData,
  center: readonly [number, number],
  radius: number,
): LineSegmentsGeometry {
  const ends: number[] = [];
  for (const line of outlines) {
    const count = line.length / 2;
    for (let i = 0; i < count; i++) {
      const j = (i + 1) % count;
      for (const v of [i, j]) ends.push((line[2 * v] - center[0]) / radius, (line[2 * v + 1] - center[1]) / radius, 0);
    }
  }
  for (let i = 0; i < walls.length; i += 2)
    ends.push((walls[i] - center[0]) / radius, (walls[i + 1] - center[1]) / radius, 0);
  const geometry = new LineSegmentsGeometry();
  // An empty instanced geometry is an error in three.js: a segment of no length draws nothing.
  geometry.setPositions(ends.length > 0 ? ends : [0, 0, 0, 0, 0, 0]);
  return geometry;
}

function drawn<T extends three.Object3D>(object: T, order: number): T {
  object.renderOrder = order;
  object.frustumCulled = false;
  return object;
}

const unitColour = (colour: string): [number, number, number] =>
  bytesOf(colour).map((byte) => byte / 255) as [number, number, number];
