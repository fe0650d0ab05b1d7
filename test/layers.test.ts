import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative } from 'node:path';
import ts from 'typescript';
import { expect, test } from 'vitest';

interface Import {
  readonly from: string;
  readonly to: string;
  readonly typeOnly: boolean;
}

const folders = [...readFileSync('src/README.md', 'utf8').matchAll(/^\| `(\w+)\/` \|/gm)].map(([, name]) => name);

const files = readdirSync('src', { recursive: true, withFileTypes: true })
  .filter((entry) => entry.isFile() && /\.(ts|mts|js|mjs)$/.test(entry.name) && !entry.name.endsWith('.d.ts'))
  .map((entry) => relative('.', join(entry.parentPath, entry.name)));

/** Every relative import or export of a file, static or not, with where it leads. */
function importsOf(file: string): Import[] {
  const source = ts.createSourceFile(file, readFileSync(file, 'utf8'), ts.ScriptTarget.Latest, true);
  const found: Import[] = [];
  const add = (node: ts.Node | undefined, typeOnly: boolean): void => {
    if (!node || !ts.isStringLiteralLike(node) || !node.text.startsWith('.')) return;
    found.push({ from: file, to: join(dirname(file), node.text.replace(/\?.*$/, '')), typeOnly });
  };
  const visit = (node: ts.Node): void => {
    if (ts.isImportDeclaration(node)) {
      const named = node.importClause?.namedBindings;
      const allTypes = named !== undefined && ts.isNamedImports(named) && named.elements.length > 0 && named.elements.every((element) => element.isTypeOnly) && !node.importClause?.name;
      add(node.moduleSpecifier, node.importClause?.phaseModifier === ts.SyntaxKind.TypeKeyword || allTypes);
    }
    if (ts.isExportDeclaration(node)) add(node.moduleSpecifier, node.isTypeOnly);
    if (ts.isImportTypeNode(node) && ts.isLiteralTypeNode(node.argument)) add(node.argument.literal, true);
    if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword) add(node.arguments[0], false);
    ts.forEachChild(node, visit);
  };
  visit(source);
  return found;
}

const imports = files.flatMap(importsOf);
const folderOf = (file: string): string => file.split('/')[1] ?? '';

test('the list of folders is that of src/', () => {
  const present = readdirSync('src', { withFileTypes: true }).filter((entry) => entry.isDirectory()).map((entry) => entry.name);
  expect(folders.length).toBeGreaterThan(10);
  expect(present.filter((name) => !folders.includes(name))).toEqual([]);
});

test('a folder imports only folders above it, types included', () => {
  const upward = imports.filter(({ from, to }) => to.startsWith('src/') && folders.indexOf(folderOf(to)) > folders.indexOf(folderOf(from)));
  expect(imports.length).toBeGreaterThan(300);
  expect(upward.map(({ from, to }) => `${from} imports ${to}`)).toEqual([]);
});

test('relative imports name a file with its ending', () => {
  expect(imports.filter(({ to }) => to.startsWith('src/') && !/\.(ts|mts|js|mjs|json|css|yaml|c|py|d\.ts)$/.test(to)).map(({ from, to }) => `${from} imports ${to}`)).toEqual([]);
});

test('no file imports itself through others, types apart', () => {
  const edges = new Map(files.map((file) => [file, imports.filter(({ from, typeOnly }) => from === file && !typeOnly).map(({ to }) => to)]));
  const done = new Set<string>();
  const cycles: string[] = [];
  const walk = (file: string, path: readonly string[]): void => {
    if (path.includes(file)) {
      cycles.push([...path.slice(path.indexOf(file)), file].join(' → '));
      return;
    }
    if (done.has(file)) return;
    for (const next of edges.get(file) ?? []) walk(next, [...path, file]);
    done.add(file);
  };
  for (const file of files) walk(file, []);
  expect(cycles).toEqual([]);
});

test('the core touches no file, screen, clock or global random numbers', () => {
  const core = files.filter((file) => folders.indexOf(folderOf(file)) <= folders.indexOf('infer'));
  const forbidden = /\b(Math\.random|Date\.now|new Date\b|console\.|process\.|document\.(?:create|get|query|body)|window\.|performance\.|localStorage)|from 'node:/;
  const offenders = core.flatMap((file) => {
    const code = readFileSync(file, 'utf8').replace(/\/\*[\s\S]*?\*\/|\/\/.*$/gm, '');
    const found = forbidden.exec(code);
    return found ? [`${file}: ${found[0]}`] : [];
  });
  expect(core.length).toBeGreaterThan(80);
  expect(offenders).toEqual([]);
});
