// Does every import go down the table of rooms, and does no file reach what it must not?

import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, posix, relative } from 'node:path';
import { fileURLToPath } from 'node:url';
import ts from 'typescript';
import { expect, test } from 'vitest';

/**
 * The rooms from drawing board to bedrock: a file imports from its own room and from rooms that stand later in this
 * list, type-only imports included. The table in DEVELOPERS.md is the same one with the reasons.
 *
 * `only`: besides itself the room may import these rooms and no others. `packages` false: nor any package.
 */
const ROOMS: readonly { readonly path: string; readonly only?: readonly string[]; readonly packages?: false }[] = [
  { path: 'cli', only: ['src/index.ts', 'viewer/server'] },
  { path: 'viewer/server', only: ['src/results'] },
  { path: 'viewer/page', only: ['src/results', 'src/projected', 'src/numerics'] },
  { path: 'src/index.ts' },
  { path: 'src/questions' },
  { path: 'src/figures' },
  { path: 'src/results' },
  { path: 'src/accuracy' },
  { path: 'src/scattering' },
  { path: 'src/projected' },
  { path: 'src/eigen', only: ['src/numerics'], packages: false },
  { path: 'src/operator' },
  { path: 'src/elements' },
  { path: 'src/mesh' },
  { path: 'src/boundary' },
  { path: 'src/device' },
  { path: 'src/geometry' },
  { path: 'src/materials' },
  { path: 'src/sparse' },
  { path: 'src/numerics' },
];

/** Pairs that stand in the right order and are forbidden all the same. */
const NEVER: readonly { readonly from: string; readonly to: string; readonly reason: string }[] = [
  { from: 'src/elements', to: 'src/materials', reason: 'coefficients come in as values' },
];

/** What no file reachable from the page may import, however far down. */
const NOT_IN_A_BROWSER = ['node:', 'src/mesh', 'src/operator', 'src/sparse'];

/** The run format is read by the page and by the store: it takes types from these rooms and nothing that runs. */
const FORMAT = { path: 'src/results/format.ts', typesFrom: ['src/device', 'src/numerics'] };

/** Built by another compiler with its own rules. */
const OUTSIDE = 'src/sparse/kernels/wasm';

const ROOT = join(dirname(fileURLToPath(import.meta.url)), '..');

interface Import {
  /** Path from the root ('src/mesh/mesh.ts'), 'node:fs', or a package's name. */
  readonly target: string;
  readonly line: number;
  readonly typeOnly: boolean;
}

interface SourceFile {
  readonly imports: readonly Import[];
  /** Uses of the console, the clock or unseeded chance: "Date.now at line 3". */
  readonly impure: readonly string[];
}

type Code = ReadonlyMap<string, SourceFile>;

/** All .ts files of the three folders, parsed. */
function readCode(): Code {
  const code = new Map<string, SourceFile>();
  for (const folder of ['src', 'cli', 'viewer']) {
    for (const entry of readdirSync(join(ROOT, folder), { recursive: true, withFileTypes: true })) {
      const path = relative(ROOT, join(entry.parentPath, entry.name)).replaceAll('\\', '/');
      if (!entry.isFile() || !/\.[cm]?tsx?$/.test(path) || path.startsWith(`${OUTSIDE}/`)) continue;
      code.set(path, parse(path, readFileSync(join(ROOT, path), 'utf8')));
    }
  }
  return code;
}

function parse(path: string, text: string): SourceFile {
  const tree = ts.createSourceFile(path, text, ts.ScriptTarget.Latest, true);
  const imports: Import[] = [];
  const impure: string[] = [];
  const lineOf = (node: ts.Node): number => tree.getLineAndCharacterOfPosition(node.getStart(tree)).line + 1;
  const note = (specifier: ts.Node | undefined, typeOnly: boolean): void => {
    if (!specifier || !ts.isStringLiteralLike(specifier)) return;
    imports.push({ target: resolve(path, specifier.text), line: lineOf(specifier), typeOnly });
  };
  const visit = (node: ts.Node): void => {
    if (ts.isImportDeclaration(node)) {
      note(node.moduleSpecifier, node.importClause?.phaseModifier === ts.SyntaxKind.TypeKeyword);
    } else if (ts.isExportDeclaration(node)) {
      note(node.moduleSpecifier, node.isTypeOnly);
    } else if (ts.isImportTypeNode(node)) {
      note(ts.isLiteralTypeNode(node.argument) ? node.argument.literal : undefined, true);
    } else if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword) {
      note(node.arguments[0], false);
    } else if (isWorkerAddress(node)) {
      note(node.arguments?.[0], false);
    }
    const name = impureName(node);
    if (name) impure.push(`${name} at line ${String(lineOf(node))}`);
    ts.forEachChild(node, visit);
  };
  visit(tree);
  return { imports, impure };
}

function resolve(from: string, specifier: string): string {
  if (specifier.startsWith('.')) return posix.normalize(posix.join(posix.dirname(from), specifier));
  return NODE_MODULES.has(specifier.split('/')[0]) ? `node:${specifier}` : specifier;
}

/** Names of Node's own modules that people write without "node:". */
const NODE_MODULES = new Set([
  'assert',
  'buffer',
  'child_process',
  'crypto',
  'fs',
  'http',
  'os',
  'path',
  'url',
  'zlib',
]);

/** new URL('./x.ts', import.meta.url): how a worker's file is named. */
function isWorkerAddress(node: ts.Node): node is ts.NewExpression {
  if (!ts.isNewExpression(node) || !ts.isIdentifier(node.expression) || node.expression.text !== 'URL') return false;
  const [file, base] = node.arguments ?? [];
  return !!file && ts.isStringLiteralLike(file) && /\.ts$/.test(file.text) && base?.getText() === 'import.meta.url';
}

function impureName(node: ts.Node): string | null {
  if (ts.isPropertyAccessExpression(node)) {
    const owner = node.expression.getText().replace(/^globalThis\./, '');
    if (owner === 'console') return `console.${node.name.text}`;
    const full = `${owner}.${node.name.text}`;
    return ['Date.now', 'Math.random', 'performance.now', 'process.hrtime'].includes(full) ? full : null;
  }
  if (ts.isNewExpression(node) && node.expression.getText() === 'Date' && !node.arguments?.length) return 'new Date()';
  return null;
}

const within = (path: string, room: string): boolean => path === room || path.startsWith(`${room}/`);
const roomOf = (path: string): number => ROOMS.findIndex((room) => within(path, room.path));
const isOwn = (target: string): boolean =>
  /^(src|cli|viewer|test|meshes-demo)\//.test(target) || target.startsWith('.');

/** Everything wrong with the imports, one sentence each; empty when the table holds. */
function faultsOf(code: Code): string[] {
  return [...roomFaults(code), ...cycleFaults(code), ...browserFaults(code), ...impureFaults(code)];
}

function roomFaults(code: Code): string[] {
  const faults: string[] = [];
  for (const [path, file] of code) {
    const from = roomOf(path);
    if (from < 0) {
      faults.push(`${path} stands in no room of the table`);
      continue;
    }
    const room = ROOMS[from];
    for (const { target, line, typeOnly } of file.imports) {
      const say = (reason: string): unknown => faults.push(`${path}:${String(line)} imports ${target}: ${reason}`);
      if (path === FORMAT.path) {
        if (!typeOnly) say('the run format takes types only');
        if (!FORMAT.typesFrom.some((r) => within(target, r))) say('not a room the run format takes types from');
      }
      if (!isOwn(target)) {
        if (room.packages === false) say(`${room.path} imports ${room.only!.join(', ')} only`);
        continue;
      }
      // Data beside the code (package.json, a .wasm) belongs to no room.
      if (!/\.[cm]?tsx?$/.test(target)) {
        if (!/\.(json|wasm|css)$/.test(target)) say('a relative import is written with its .ts extension');
        continue;
      }
      const to = roomOf(target);
      if (to === from) continue;
      if (to < 0) say('no room of the table');
      else if (room.only && !room.only.includes(ROOMS[to].path))
        say(`${room.path} imports ${room.only.join(', ')} only`);
      else if (to < from) say('an import goes down the table');
      const never = NEVER.find((pair) => within(path, pair.from) && within(target, pair.to));
      if (never) say(never.reason);
    }
  }
  return faults;
}

/** Depth-first; a file met again while still open closes a cycle. */
function cycleFaults(code: Code): string[] {
  const faults: string[] = [];
  const done = new Set<string>();
  const open: string[] = [];
  const enter = (path: string): void => {
    if (done.has(path)) return;
    const at = open.indexOf(path);
    if (at >= 0) {
      faults.push(`cycle: ${[...open.slice(at), path].join(' → ')}`);
      return;
    }
    open.push(path);
    for (const { target } of code.get(path)?.imports ?? []) if (code.has(target)) enter(target);
    open.pop();
    done.add(path);
  };
  for (const path of code.keys()) enter(path);
  return faults;
}

/** Breadth-first from every file of the page and of what it may evaluate; the way there is part of the message. */
function browserFaults(code: Code): string[] {
  const faults: string[] = [];
  const cameFrom = new Map<string, string | null>();
  const queue = [...code.keys()].filter((path) => within(path, 'viewer/page') || within(path, 'src/projected'));
  for (const path of queue) cameFrom.set(path, null);
  for (let i = 0; i < queue.length; i++) {
    const path = queue[i];
    for (const { target } of code.get(path)?.imports ?? []) {
      const bad = NOT_IN_A_BROWSER.some((b) => (b === 'node:' ? target.startsWith(b) : within(target, b)));
      if (bad) faults.push(`the page reaches ${target}: ${wayTo(path, cameFrom).join(' → ')}`);
      if (bad || cameFrom.has(target) || !code.has(target)) continue;
      cameFrom.set(target, path);
      queue.push(target);
    }
  }
  return faults;
}

function wayTo(path: string, cameFrom: ReadonlyMap<string, string | null>): string[] {
  const before = cameFrom.get(path);
  return before ? [...wayTo(before, cameFrom), path] : [path];
}

function impureFaults(code: Code): string[] {
  const faults: string[] = [];
  for (const [path, file] of code) {
    if (path.startsWith('src/'))
      for (const use of file.impure) faults.push(`${path} uses ${use}: the caller passes it in`);
  }
  return faults;
}

test('every import of the program keeps to the table of rooms', () => {
  expect(faultsOf(readCode())).toEqual([]);
});

/** The faults of a made-up program: file → text. */
const faultsIn = (files: Record<string, string>): string[] =>
  faultsOf(new Map(Object.entries(files).map(([path, text]) => [path, parse(path, text)])));

test.each([
  ['up the table', { 'src/mesh/a.ts': "import '../questions/b.ts';" }, /goes down/],
  ['up the table, by type', { 'src/mesh/a.ts': "import type { B } from '../operator/b.ts';" }, /goes down/],
  ['up the table, by type expression', { 'src/mesh/a.ts': "type B = import('../operator/b.ts').B;" }, /goes down/],
  ['up the table, late', { 'src/mesh/a.ts': "const b = await import('../operator/b.ts');" }, /goes down/],
  ['up the table, passed on', { 'src/mesh/a.ts': "export * from '../operator/b.ts';" }, /goes down/],
  [
    'up the table, as a worker',
    { 'src/mesh/a.ts': "new Worker(new URL('../operator/b.ts', import.meta.url));" },
    /goes down/,
  ],
  ['into the public contents', { 'src/results/a.ts': "import '../index.ts';" }, /goes down/],
  ['past the contents page', { 'cli/a.ts': "import type { B } from '../src/results/b.ts';" }, /only/],
  ['from the command to the page', { 'cli/a.ts': "import '../viewer/page/b.ts';" }, /only/],
  ['from the server past the results', { 'viewer/server/a.ts': "import '../../src/index.ts';" }, /only/],
  ['from the page to the device', { 'viewer/page/a.ts': "import '../../src/device/model.ts';" }, /only/],
  ['eigen to sparse', { 'src/eigen/a.ts': "import '../sparse/b.ts';" }, /only/],
  ['eigen to a package', { 'src/eigen/a.ts': "import 'ml-matrix';" }, /only/],
  ['elements to materials', { 'src/elements/a.ts': "import '../materials/b.ts';" }, /values/],
  ['outside every room', { 'src/utils.ts': '' }, /no room/],
  ['into the tests', { 'src/mesh/a.ts': "import '../../test/b.ts';" }, /no room/],
  ['without extension', { 'src/mesh/a.ts': "import './b';" }, /extension/],
  [
    'in a ring',
    { 'src/mesh/a.ts': "import './b.ts';", 'src/mesh/b.ts': "import type { A } from './a.ts';" },
    /a\.ts → src\/mesh\/b\.ts → src\/mesh\/a\.ts/,
  ],
  ['to itself', { 'src/mesh/a.ts': "import './a.ts';" }, /cycle/],
  ['from the page to Node', { 'viewer/page/a.ts': "import 'node:fs';" }, /page reaches node:fs/],
  ['from the page to Node, unmarked', { 'viewer/page/a.ts': "import 'fs/promises';" }, /page reaches node:fs/],
  [
    'from the page to Node, at two removes',
    {
      'viewer/page/a.ts': "import '../../src/results/b.ts';",
      'src/results/b.ts': "import './c.ts';",
      'src/results/c.ts': "import 'node:fs';",
    },
    /page reaches node:fs: viewer\/page\/a\.ts → src\/results\/b\.ts → src\/results\/c\.ts/,
  ],
  [
    'from the page to the mesher',
    {
      'viewer/page/a.ts': "import '../../src/results/b.ts';",
      'src/results/b.ts': "import type { M } from '../mesh/mesh.ts';",
    },
    /page reaches src\/mesh/,
  ],
  [
    'running code in the run format',
    { 'src/results/format.ts': "import { c } from '../numerics/c.ts';" },
    /types only/,
  ],
  [
    'other types in the run format',
    { 'src/results/format.ts': "import type { M } from '../mesh/m.ts';" },
    /not a room/,
  ],
  ['the console', { 'src/mesh/a.ts': "console.log('x');" }, /console\.log/],
  ['the clock', { 'src/mesh/a.ts': 'const t = Date.now();' }, /Date\.now/],
  ['the clock, another way', { 'src/mesh/a.ts': 'const t = new Date();' }, /new Date/],
  ['chance', { 'src/mesh/a.ts': 'const r = globalThis.Math.random();' }, /Math\.random/],
])('it rejects an import %s', (_, files, message) => {
  const faults = faultsIn(files);
  expect(faults).toHaveLength(1);
  expect(faults[0]).toMatch(message);
});

test('it accepts what the table allows', () => {
  expect(
    faultsIn({
      'cli/a.ts':
        "import { x } from '../src/index.ts'; import '../viewer/server/b.ts'; import 'node:fs'; import 'commander';",
      'src/index.ts': "export * from './questions/modes.ts';",
      'src/questions/modes.ts': "import '../figures/field.ts'; import '../mesh/mesh.ts';",
      'src/results/format.ts': "import type { D } from '../device/model.ts'; const when = new Date(0);",
      'src/eigen/a.ts': "import './b.ts'; import '../numerics/complex.ts';",
      'viewer/page/a.ts': "import '../../src/results/format.ts'; import * as THREE from 'three'; import './page.css';",
      'cli/main.ts': 'console.log(Date.now());',
    }),
  ).toEqual([]);
});
