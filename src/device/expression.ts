// What number does an arithmetic expression of knobs give?

/**
 * Grammar, loosest first; functions take radians, `^` binds to the right and tighter than a leading minus:
 *
 *     sum     = product { (+|-) product }          power = value [ ^ signed ]
 *     product = signed { (*|/) signed }            value = number | pi | knob | function ( sum {, sum} ) | ( sum )
 *     signed  = { + | - } power
 */
export type Expression =
  | { readonly kind: 'number'; readonly at: number; readonly value: number }
  | { readonly kind: 'name'; readonly at: number; readonly name: string }
  | { readonly kind: 'call'; readonly at: number; readonly name: string; readonly terms: readonly Expression[] };

/** A fault inside an expression. `column` counts from 1 within its text. */
export class ExpressionError extends Error {
  readonly column: number;
  readonly expected: string;
  readonly mend: string;

  constructor(column: number, reason: string, expected: string, mend: string) {
    super(reason);
    this.name = 'ExpressionError';
    this.column = column;
    this.expected = expected;
    this.mend = mend;
  }
}

/** Longest text taken: bounds the parser's recursion. */
const MOST_CHARACTERS = 1000;

/** @throws ExpressionError with the column of the fault. */
export function parseExpression(text: string): Expression {
  if (text.length > MOST_CHARACTERS)
    throw new ExpressionError(1, `${text.length} characters`, `at most ${MOST_CHARACTERS}`, 'use knobs for the parts');
  const tokens = tokenize(text);
  let next = 0;
  const is = (symbol: string): boolean => tokens[next].text === symbol;

  const sum = (): Expression => {
    let left = product();
    while (is('+') || is('-')) left = binary(left, product);
    return left;
  };
  const product = (): Expression => {
    let left = signed();
    while (is('*') || is('/')) left = binary(left, signed);
    return left;
  };
  const binary = (left: Expression, operand: () => Expression): Expression => {
    const { text: name, at } = tokens[next++];
    return { kind: 'call', name, at, terms: [left, operand()] };
  };
  const signed = (): Expression => {
    if (is('+')) {
      next++;
      return signed();
    }
    if (!is('-')) return power();
    const { at } = tokens[next++];
    return { kind: 'call', name: 'negate', at, terms: [signed()] };
  };
  const power = (): Expression => {
    const base = value();
    return is('^') ? binary(base, signed) : base;
  };
  const value = (): Expression => {
    const token = tokens[next++];
    if (token.kind === 'number') return { kind: 'number', at: token.at, value: Number(token.text) };
    if (token.kind === 'name') {
      if (is('(')) return call(token);
      if (token.text === 'pi') return { kind: 'number', at: token.at, value: Math.PI };
      if (Object.hasOwn(FUNCTIONS, token.text))
        throw new ExpressionError(token.at, `${token.text} without ( )`, `${token.text}(…)`, `write ${token.text}(…)`);
      return { kind: 'name', at: token.at, name: token.text };
    }
    if (token.text === '(') {
      const inner = sum();
      close(token.at);
      return inner;
    }
    throw new ExpressionError(
      token.at,
      token.kind === 'end' ? 'it ends too early' : `unexpected ${token.text}`,
      'a number, a knob, a function or (',
      token.text === '*' ? 'write powers with ^' : 'complete the expression',
    );
  };
  const call = (name: Token): Expression => {
    const rule = Object.hasOwn(FUNCTIONS, name.text) ? FUNCTIONS[name.text] : undefined;
    if (rule === undefined)
      throw new ExpressionError(
        name.at,
        `unknown function ${name.text}`,
        `one of ${Object.keys(FUNCTIONS).join(', ')}`,
        'use one of these; a product is written with *',
      );
    const opened = tokens[next++].at;
    const terms = [sum()];
    while (is(',')) {
      next++;
      terms.push(sum());
    }
    close(opened);
    if (rule.many ? terms.length < 2 : terms.length !== 1)
      throw new ExpressionError(
        name.at,
        `${name.text} with ${terms.length} value${terms.length === 1 ? '' : 's'}`,
        rule.many ? 'two or more values' : 'one value',
        rule.many ? `write ${name.text}(a, b)` : `write ${name.text}(a)`,
      );
    return { kind: 'call', name: name.text, at: name.at, terms };
  };
  const close = (opened: number): void => {
    if (!is(')'))
      throw new ExpressionError(
        tokens[next].at,
        `the ( of column ${opened} is not closed`,
        ')',
        'add the ); inside [ ] or { } of YAML an expression with a comma needs quotes',
      );
    next++;
  };

  const result = sum();
  const rest = tokens[next];
  if (rest.kind !== 'end')
    throw new ExpressionError(
      rest.at,
      `unexpected ${rest.text}`,
      'an operator + - * / ^ or the end',
      rest.text === ')' ? 'remove the ), or add its (' : 'write products with *, and a unit nowhere',
    );
  return result;
}

/** Value at the given knob values. @throws ExpressionError when it is not a finite number, or a name is not known. */
export function evaluateExpression(expression: Expression, values: ReadonlyMap<string, number>): number {
  if (expression.kind === 'number') return finite(expression.value, expression.at, 'a number too large');
  if (expression.kind === 'name') {
    const value = values.get(expression.name);
    if (value === undefined)
      throw new ExpressionError(expression.at, `unknown knob ${expression.name}`, 'a knob of this file', 'define it');
    return value;
  }
  const { name, at } = expression;
  const terms = expression.terms.map((term) => evaluateExpression(term, values));
  const [a, b] = terms as [number, number];
  switch (name) {
    case '+':
      return finite(a + b, at, 'a sum too large');
    case '-':
      return finite(a - b, at, 'a difference too large');
    case '*':
      return finite(a * b, at, 'a product too large');
    case '/':
      return finite(a / b, at, b === 0 ? 'a division by zero' : 'a quotient too large');
    case '^':
      return finite(a ** b, at, `${a} ^ ${b}, which is not a finite real number`);
    case 'negate':
      return -a;
    default:
      return finite(
        FUNCTIONS[name].of(...terms),
        at,
        `${name} of ${terms.join(', ')}, which is not a finite real number`,
      );
  }
}

/** Names of the knobs that the expression uses, with their first column. */
export function namesIn(expression: Expression, found = new Map<string, number>()): Map<string, number> {
  if (expression.kind === 'name' && !found.has(expression.name)) found.set(expression.name, expression.at);
  if (expression.kind === 'call') for (const term of expression.terms) namesIn(term, found);
  return found;
}

interface Rule {
  readonly many?: true;
  readonly of: (...values: number[]) => number;
}

const FUNCTIONS: Readonly<Record<string, Rule>> = {
  sqrt: { of: Math.sqrt },
  sin: { of: Math.sin },
  cos: { of: Math.cos },
  tan: { of: Math.tan },
  exp: { of: Math.exp },
  log: { of: Math.log },
  abs: { of: Math.abs },
  min: { many: true, of: Math.min },
  max: { many: true, of: Math.max },
};

/** Names that a knob may not take. */
export const RESERVED_NAMES: ReadonlySet<string> = new Set(['pi', ...Object.keys(FUNCTIONS)]);

function finite(value: number, column: number, reason: string): number {
  if (Number.isFinite(value)) return value;
  throw new ExpressionError(column, reason, 'a finite real number', 'change the expression or its knobs');
}

interface Token {
  readonly kind: 'number' | 'name' | 'symbol' | 'end';
  readonly text: string;
  readonly at: number;
}

function tokenize(text: string): Token[] {
  const tokens: Token[] = [];
  const pattern = /\s*(?:((?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)|([\p{L}_][\p{L}\p{N}_]*)|([-+*/^(),]))/uy;
  let end = 0;
  while (text.slice(end).trim() !== '') {
    pattern.lastIndex = end;
    const match = pattern.exec(text);
    if (match === null) {
      const at = end + text.slice(end).search(/\S/);
      throw new ExpressionError(
        at + 1,
        `unexpected ${String.fromCodePoint(text.codePointAt(at)!)}`,
        'numbers, knobs, + - * / ^ ( ), pi and functions',
        'remove it',
      );
    }
    end = pattern.lastIndex;
    const token = match[1] ?? match[2] ?? match[3];
    const kind = match[1] !== undefined ? 'number' : match[2] !== undefined ? 'name' : 'symbol';
    tokens.push({ kind, text: token, at: end - token.length + 1 });
  }
  tokens.push({ kind: 'end', text: 'the end', at: text.length + 1 });
  return tokens;
}
