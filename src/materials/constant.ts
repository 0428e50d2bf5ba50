// What is the permittivity of a material that does not depend on frequency?

import { complex, multiply } from '../numerics/complex.ts';
import type { Complex } from '../numerics/complex.ts';

/** A material as its maker states it. Im > 0 is loss in each (time dependence exp(−iωt)). */
export type ConstantMaterial =
  { readonly index: Complex } | { readonly permittivity: Complex; readonly lossTangent?: number };

/**
 * Relative permittivity: n² of an index n + iκ, or ε (1 + i tan δ). The loss tangent is |Im ε|/Re ε, whose sign the engineers'
 * exp(+jωt) writes as ε′ − jε″; here loss is +i.
 */
export function constantPermittivity(material: ConstantMaterial): Complex {
  if ('index' in material) return multiply(material.index, material.index);
  return multiply(material.permittivity, complex(1, material.lossTangent ?? 0));
}
