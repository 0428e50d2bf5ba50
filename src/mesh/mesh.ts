// What is a mesh?

import type { CurvePiece, Shape } from '../geometry/curves.ts';

/** Region numbers of `Mesh.regions`: 0 … are indices into the device's bodies. */
export const BACKGROUND = -1;
export const LAYER = -2;

/**
 * Tagged triangles with truly curved edges. Plain data: determinate for a given device and plan.
 *
 *            2
 *           / \        local edge i joins local vertices i and (i+1) mod 3;
 *   edge 2 /   \ edge 1  triangles are counterclockwise.
 *         /     \
 *        0-------1
 *          edge 0
 */
export interface Mesh {
  /** [x0,y0,x1,y1,…], length units of the device. */
  readonly vertices: Float64Array;
  /** Three vertices a triangle, counterclockwise. */
  readonly triangles: Int32Array;
  /** Body index, BACKGROUND or LAYER, one a triangle. */
  readonly regions: Int32Array;
  /** Two vertices an edge, the lower number first. */
  readonly edges: Int32Array;
  /** Three edges a triangle, in local order. */
  readonly triangleEdges: Int32Array;
  /** The one or two triangles of an edge; -1 where there is none. */
  readonly edgeTriangles: Int32Array;
  /** Number of the edge's curve in `curves`, -1 for a straight edge. */
  readonly edgeCurve: Int32Array;
  /**
   * Per edge: −1, or for an outer edge that is left free (natural condition, to which walls and openings add terms) its
   * tag in `WallPlan`. Outer edges are fixed to zero where this is −1, or absent.
   */
  readonly edgeFree?: Int32Array;
  /** Degree g of the edge polynomials. */
  readonly curveOrder: number;
  /**
   * Per curved edge the g+1 points at Gauss–Lobatto nodes (of degree g, in increasing order on [-1, 1]), from the
   * edge's lower vertex to its higher one: 2(g+1) numbers a curve. The curve is their interpolating polynomial.
   */
  readonly curves: Float64Array;
  /** Center of the rim and the layer circles. */
  readonly center: readonly [number, number];
  /** Radius of the rim: all bodies lie strictly inside, the layer (region LAYER) outside. */
  readonly rimRadius: number;
  /** Radius where the layer ends (u = 0 there). */
  readonly endRadius: number;
}

/** By what an outer edge was made. */
export interface EdgeCause {
  readonly by: 'space' | 'body' | 'beyond' | 'sheet';
  /** Number of the body, half plane or sheet; 0 for the space itself. */
  readonly index: number;
  readonly middle: readonly [number, number];
}

/** Walls, openings and symmetry lines of a mesh. */
export interface WallPlan {
  /** Shapes whose union is meshed, in place of the rim's disk; empty: the disk. */
  readonly spaces: readonly Shape[];
  /** Shapes beside them that become region LAYER (stretched ends of guides). */
  readonly layers: readonly Shape[];
  /** Bodies of metal: not meshed. */
  readonly metal: ReadonlySet<number>;
  /** What is taken away: the far sides of symmetry lines. */
  readonly beyond: readonly Shape[];
  /** Walls without thickness: the mesh is cut open along them. */
  readonly sheets: readonly { readonly name: string; readonly pieces: readonly CurvePiece[] }[];
  /** −1: the field is zero on the edge; 0 and above: left free, with this tag in `Mesh.edgeFree`. */
  readonly tagOf: (cause: EdgeCause) => number;
  /** What a tag means for the singularity of a corner: field zero, slope zero, or no end at all (an opening). */
  readonly endOf: (tag: number) => 'zero' | 'free' | 'open';
  /** Equal for bodies (−1: background and layer) between which waves pass without a change of medium. */
  readonly mediumOf: (body: number) => string;
  /** Size wanted at a wall corner, as a share of the local one, from the lowest exponent of the field there. */
  readonly cornerShare: (exponent: number) => number;
}

/** What the mesher is asked for besides the shapes. */
export interface MeshPlan {
  readonly center: readonly [number, number];
  readonly rimRadius: number;
  readonly endRadius: number;
  /** Largest triangle side wanted per body (same order as the bodies), length units. */
  readonly bodySizes: readonly number[];
  readonly backgroundSize: number;
  readonly layerSize: number;
  /** Smallest triangle side at corners of the input, as a fraction of the local size (geometric grading); 1 = none. */
  readonly cornerGrading: number;
  /** Largest angle (radians) an edge may span on its curve. */
  readonly largestArc: number;
  readonly walls?: WallPlan;
  /** Places where smaller triangles are wanted than the sizes above say; the size grows with distance from them. */
  readonly wishes?: readonly SizeWish[];
}

/** From this tag on outer edges end no field: waves pass through them. */
export const FIRST_OPENING = 1000;

/** A triangle side wanted at a point, length units. */
export interface SizeWish {
  readonly x: number;
  readonly y: number;
  readonly size: number;
}
