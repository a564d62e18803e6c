import { componentSuffixes, findQuantity, type Quantity, quantities } from './quantity-table.js';

/** What an array of a standard name holds: a whole quantity or one component of it. */
export interface StandardSlot {
  readonly quantity: Quantity;
  /** Number of the component, -1 for the gathered array. */
  readonly component: number;
  /** Name without aliases, spelled as in the table. */
  readonly standard: string;
}

/** Read and turned into VelocityCovariance, never written. */
const reynoldsStress: Quantity = {
  ...(findQuantity('VelocityCovariance') as Quantity),
  name: 'ReynoldsStress',
  unit: 'Pa',
  dimension: [1, -1, -2, 0],
  nonNegative: false,
  meaning: "-rho u'_i u'_j",
};

const slots = new Map<string, StandardSlot>();
for (const quantity of [...quantities, reynoldsStress]) {
  for (const name of [quantity.name, ...quantity.aliases]) {
    slots.set(name.toLowerCase(), { quantity, component: -1, standard: quantity.name });
    if (quantity.components === 1) continue;
    componentSuffixes(quantity.components).forEach((suffix, component) => {
      slots.set(`${name}${suffix}`.toLowerCase(), { quantity, component, standard: `${quantity.name}${suffix}` });
    });
  }
}

/** The meaning of a standard name, capitals ignored; undefined for other names. */
export function slotOf(name: string): StandardSlot | undefined {
  return slots.get(name.toLowerCase());
}

/** Every name under which an array is recognised, gathered and by component. */
export const standardNames: readonly string[] = [...slots.values()].map((slot) => slot.standard);

/** True for a standard name of a quantity or of one of its components, capitals ignored. */
export function isStandardName(name: string): boolean {
  return slots.has(name.toLowerCase());
}

/** The standard spelling of a name, aliases resolved; undefined for names that are not standard. */
export function standardNameOf(name: string): string | undefined {
  return slotOf(name)?.standard;
}

/** The quantity that a standard name, gathered or of one component, belongs to. */
export function quantityOf(name: string): Quantity | undefined {
  return slotOf(name)?.quantity;
}
