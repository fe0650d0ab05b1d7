import { InputError, nearestHint, type Place } from '../units/input-error.ts';
import { findFunction, functionNames } from './functions.ts';

/** A formula as written: every node knows the character it starts at (from 0). */
export type Tree =
  | { readonly kind: 'number'; readonly value: number; readonly at: number }
  | { readonly kind: 'name'; readonly name: string; readonly at: number }
  | { readonly kind: 'call'; readonly name: string; readonly args: readonly Tree[]; readonly at: number }
  | { readonly kind: 'operation'; readonly operator: Operator; readonly args: readonly Tree[]; readonly at: number }
  | { readonly kind: 'choice'; readonly args: readonly [Tree, Tree, Tree]; readonly at: number };

export type Operator = '+' | '-' | '*' | '/' | '^' | 'negate' | '<' | '<=' | '>' | '>=' | '==' | '!=';

/** A formula that cannot be used; `column` counts characters of the formula text from 1. */
export class FormulaError extends InputError {
  readonly column: number;
  readonly formula: string;

  constructor(problem: string, formula: string, at: number, place?: Place) {
    super(`formula "${shorten(formula)}", character ${at + 1}: ${problem}`, place);
    this.name = 'FormulaError';
    this.column = at + 1;
    this.formula = formula;
  }
}

const longestFormula = 10_000;
const deepestNesting = 100;

interface Token {
  readonly kind: 'number' | 'name' | 'sign' | 'end';
  readonly text: string;
  readonly at: number;
}

/**
 * Formula text → tree. Numbers, names, + - * / ^, comparisons, c ? a : b, parentheses and the
 * functions of `functions.ts`; everything else is a FormulaError at its character. `^` binds
 * tighter than a sign before it and groups to the right: -2^2 = -4, 2^3^2 = 512.
 */
export function parseFormula(text: string): Tree {
  if (text.length > longestFormula) {
    throw new FormulaError(`${text.length} characters, at most ${longestFormula} are allowed`, text, 0);
  }
  return new Parser(text).parse();
}

class Parser {
  private readonly tokens: readonly Token[];
  private position = 0;
  private depth = 0;

  constructor(private readonly text: string) {
    this.tokens = tokenise(text);
  }

  parse(): Tree {
    const tree = this.choice();
    const rest = this.peek();
    if (rest.kind !== 'end') this.fail(unexpected(rest), rest.at);
    return tree;
  }

  private choice(): Tree {
    this.deepen();
    const condition = this.comparison();
    let tree = condition;
    if (this.take('?')) {
      const yes = this.choice();
      this.expect(':', 'between the two values of "condition ? a : b"');
      tree = { kind: 'choice', args: [condition, yes, this.choice()], at: condition.at };
    }
    this.depth--;
    return tree;
  }

  private comparison(): Tree {
    const left = this.sum();
    const operator = this.takeAny('<=', '>=', '==', '!=', '<', '>');
    if (!operator) return left;
    const right = this.sum();
    const chained = this.peek();
    if (['<=', '>=', '==', '!=', '<', '>'].includes(chained.text)) {
      this.fail('comparisons cannot be chained; write a ? b : c instead', chained.at);
    }
    return { kind: 'operation', operator: operator.text as Operator, args: [left, right], at: left.at };
  }

  private sum(): Tree {
    let left = this.product();
    for (let operator; (operator = this.takeAny('+', '-')); ) {
      left = { kind: 'operation', operator: operator.text as Operator, args: [left, this.product()], at: left.at };
    }
    return left;
  }

  private product(): Tree {
    let left = this.signed();
    for (let operator; (operator = this.takeAny('*', '/')); ) {
      left = { kind: 'operation', operator: operator.text as Operator, args: [left, this.signed()], at: left.at };
    }
    return left;
  }

  private signed(): Tree {
    const sign = this.takeAny('+', '-');
    if (!sign) return this.power();
    this.deepen();
    const operand = this.signed();
    this.depth--;
    return sign.text === '+' ? operand : { kind: 'operation', operator: 'negate', args: [operand], at: sign.at };
  }

  private power(): Tree {
    const base = this.primary();
    if (!this.take('^')) return base;
    this.deepen();
    const exponent = this.signed();
    this.depth--;
    return { kind: 'operation', operator: '^', args: [base, exponent], at: base.at };
  }

  private primary(): Tree {
    const token = this.next();
    if (token.kind === 'number') return { kind: 'number', value: Number(token.text), at: token.at };
    if (token.kind === 'name') return this.peek().text === '(' ? this.call(token) : { kind: 'name', name: token.text, at: token.at };
    if (token.text === '(') {
      const inner = this.choice();
      this.expect(')', `to close the one at character ${token.at + 1}`);
      return inner;
    }
    return this.fail(unexpected(token), token.at);
  }

  private call(name: Token): Tree {
    const known = findFunction(name.text);
    if (!known) {
      this.fail(`unknown function "${name.text}"${nearestHint(name.text, functionNames())}; allowed: ${functionNames().join(' ')}`, name.at);
    }
    this.next();
    const args: Tree[] = [];
    if (!this.take(')')) {
      do args.push(this.choice());
      while (this.take(','));
      this.expect(')', `to close the arguments of ${name.text}`);
    }
    if (args.length !== known.arity) {
      this.fail(`${name.text} takes ${known.arity} argument${known.arity === 1 ? '' : 's'}, given ${args.length}`, name.at);
    }
    return { kind: 'call', name: name.text, args, at: name.at };
  }

  private peek(): Token {
    return this.tokens[this.position];
  }

  private next(): Token {
    const token = this.tokens[this.position];
    if (token.kind !== 'end') this.position++;
    return token;
  }

  private take(sign: string): boolean {
    if (this.peek().kind !== 'sign' || this.peek().text !== sign) return false;
    this.position++;
    return true;
  }

  private takeAny(...signs: readonly string[]): Token | undefined {
    const token = this.peek();
    return token.kind === 'sign' && signs.includes(token.text) ? this.next() : undefined;
  }

  private expect(sign: string, why: string): void {
    if (!this.take(sign)) this.fail(`expected "${sign}" ${why}, found ${describe(this.peek())}`, this.peek().at);
  }

  private deepen(): void {
    if (++this.depth > deepestNesting) this.fail(`nested deeper than ${deepestNesting} levels`, this.peek().at);
  }

  private fail(problem: string, at: number): never {
    throw new FormulaError(problem, this.text, at);
  }
}

const tokenPattern = /\s*(?:((?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)|([A-Za-z_][A-Za-z0-9_]*)|(<=|>=|==|!=|[-+*/^()<>?:,]))/y;

function tokenise(text: string): readonly Token[] {
  const tokens: Token[] = [];
  tokenPattern.lastIndex = 0;
  for (let from = 0; from < text.length; from = tokenPattern.lastIndex) {
    if (text.slice(from).trim() === '') break;
    tokenPattern.lastIndex = from;
    const match = tokenPattern.exec(text);
    if (!match) {
      const at = from + text.slice(from).search(/\S/);
      const hint = { '=': '; compare with ==', '[': '; only parentheses group', '{': '; only parentheses group', '"': '; text is not allowed', "'": '; text is not allowed', '.': '; members are not allowed' }[text[at]];
      throw new FormulaError(`"${text[at]}" is not allowed in a formula${hint ?? ''}`, text, at);
    }
    const [whole, number, name, sign] = match;
    const kind = number !== undefined ? 'number' : name !== undefined ? 'name' : 'sign';
    const token = { kind, text: number ?? name ?? sign, at: from + whole.length - (number ?? name ?? sign).length } as const;
    if (kind === 'number' && !Number.isFinite(Number(number))) {
      throw new FormulaError(`the number ${number} is too large`, text, token.at);
    }
    tokens.push(token);
  }
  tokens.push({ kind: 'end', text: '', at: text.length });
  return tokens;
}

function describe(token: Token): string {
  return token.kind === 'end' ? 'the end of the formula' : `"${token.text}"`;
}

function unexpected(token: Token): string {
  const hint = token.kind === 'number' || token.kind === 'name' || token.text === '(' ? '; write * between factors' : '';
  return `unexpected ${describe(token)}${hint}`;
}

function shorten(formula: string): string {
  return formula.length > 80 ? `${formula.slice(0, 77)}…` : formula;
}
