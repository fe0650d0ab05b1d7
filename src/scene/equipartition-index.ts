/** Energy equipartition needs a spectrum steeper than this: a flatter one holds no finite energy. */
const flattest = 2;

/** Hands a reason to `fail` where an electron index p allows no equipartition. */
export function checkEquipartition(index: number, fail: (reason: string) => never): void {
  if (index <= flattest) fail(`the index ${index} is too flat for equipartition: above ${flattest} the cosmic rays have a finite energy (Beck & Krause 2005)`);
}
