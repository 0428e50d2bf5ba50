// What is a mesh?

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
}
