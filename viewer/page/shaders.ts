// How does a graphics card turn Re u and Im u into a colour?

import { MAP_ENTRIES } from '../../src/results/colours.ts';

export const FIELD_VERTEX = /* glsl */ `
in vec3 position;
in vec2 u;
uniform mat4 projectionMatrix;
uniform mat4 modelViewMatrix;
out vec2 value;
out vec2 place;
void main() {
  value = u;
  place = position.xy;
  gl_Position = projectionMatrix * modelViewMatrix * vec4(position, 1.0);
}
`;

/** Shared by both fragment shaders: how much of the picture stands at this pixel, 0 to 1. */
const PRESENCE = /* glsl */ `
precision highp float;
uniform vec2 size;
uniform vec4 quiet; // left, top, right, bottom margins that hold text, CSS pixels
uniform float ratio;
uniform float round; // 1: fades at the rim; 0: walls all around
uniform vec2 origin;
uniform vec3 ground;
uniform vec3 ink;
in vec2 value;
in vec2 place;
out vec4 colour;

float beyond(float distance, float margin, float soft) { return smoothstep(margin - 10.0, margin + soft, distance); }

float presence() {
  vec2 p = gl_FragCoord.xy / ratio;
  float open = beyond(p.x, quiet.x, 26.0) * beyond(size.x - p.x, quiet.z, 26.0)
    * beyond(p.y, quiet.w, 2.0) * beyond(size.y - p.y, quiet.y, 2.0);
  float rim = 1.0 - round * smoothstep(0.93, 1.0, length(place));
  return mix(0.1, 1.0, open) * rim;
}
`;

/** view 0: Re(u e^{−iωt}) through the diverging map; 1: |u|²; 2: arg u − ωt. */
export const FIELD_FRAGMENT = /* glsl */ `${PRESENCE}
uniform sampler2D map;
uniform int view;
uniform float limit;
uniform float phase;
const float PI = 3.14159265358979;

vec3 mapped(float t) { return texture(map, vec2((t * ${MAP_ENTRIES - 1}.0 + 0.5) / ${MAP_ENTRIES}.0, 0.5)).rgb; }

void main() {
  float kept = presence();
  vec3 shade;
  if (view == 0) {
    float wave = value.x * cos(phase) + value.y * sin(phase);
    shade = mapped(0.5 + 0.5 * clamp(wave / limit, -1.0, 1.0));
  } else if (view == 1) {
    shade = mapped(clamp(dot(value, value) / (limit * limit), 0.0, 1.0));
  } else {
    shade = mapped(fract((atan(value.y, value.x) - phase) / (2.0 * PI)));
    // Where there is next to no field its phase means little.
    kept *= smoothstep(0.0, 0.03 * limit, length(value));
  }
  colour = vec4(mix(ground, shade, kept), 1.0);
}
`;

/** Fine oblique lines that keep their distance at every zoom and stay with the body when it moves. */
export const HATCH_FRAGMENT = /* glsl */ `${PRESENCE}
void main() {
  vec2 p = gl_FragCoord.xy / ratio - origin;
  float across = abs(mod(p.x + p.y, 9.0) - 4.5) * 0.7071;
  float line = 1.0 - smoothstep(0.15, 0.85, across);
  float strength = 0.2 * line * presence();
  colour = vec4(ink * strength, strength);
}
`;
