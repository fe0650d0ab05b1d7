import { findColumn, freeId, freeName, type PageColumn, type PageDocument, type PageRow } from './page-document.ts';

/** A change of the document: every one can be undone. */
export type Edit = (page: PageDocument) => PageDocument;

/** Adds a column at the end and chooses it. */
export function addColumn(name: string, scene: string, hypothesis: PageColumn['hypothesis'] = {}): Edit {
  return (page) => {
    const id = freeId(page.columns);
    return { ...page, columns: [...page.columns, { id, name: freeName(name, page.columns), scene, hypothesis }], chosen: id };
  };
}

/** Puts a copy of a column behind it and chooses the copy. */
export function copyColumn(id: string): Edit {
  return (page) => {
    const at = page.columns.findIndex((column) => column.id === id);
    if (at < 0) return page;
    const copy = { ...page.columns[at], id: freeId(page.columns), name: freeName(page.columns[at].name, page.columns) };
    return { ...page, columns: [...page.columns.slice(0, at + 1), copy, ...page.columns.slice(at + 1)], chosen: copy.id };
  };
}

/** Takes a column away; the last one stays. */
export function dropColumn(id: string): Edit {
  return (page) => {
    if (page.columns.length < 2 || !findColumn(page, id)) return page;
    const columns = page.columns.filter((column) => column.id !== id);
    const chosen = page.chosen === id ? columns[0].id : page.chosen;
    return { ...page, columns, chosen, ...(page.differenceFrom === id && { differenceFrom: undefined }) };
  };
}

/** Moves a column by some places, to the left where negative. */
export function moveColumn(id: string, places: number): Edit {
  return (page) => {
    const from = page.columns.findIndex((column) => column.id === id);
    const to = Math.max(0, Math.min(page.columns.length - 1, from + places));
    if (from < 0 || from === to) return page;
    const columns = [...page.columns];
    columns.splice(to, 0, ...columns.splice(from, 1));
    return { ...page, columns };
  };
}

/** Changes parts of one column. */
export function changeColumn(id: string, change: Partial<Omit<PageColumn, 'id'>>): Edit {
  return (page) => ({ ...page, columns: page.columns.map((column) => (column.id === id ? { ...column, ...change } : column)) });
}

/** Swaps a row for another. */
export function changeRow(index: number, row: PageRow): Edit {
  return (page) => ({ ...page, rows: page.rows.map((old, k) => (k === index ? row : old)) });
}

/** Adds a row at the end, or takes one away. */
export function addRow(row: PageRow): Edit {
  return (page) => ({ ...page, rows: [...page.rows, row] });
}

export function dropRow(index: number): Edit {
  return (page) => ({ ...page, rows: page.rows.filter((_, k) => k !== index) });
}
