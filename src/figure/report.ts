import { lineUpTable } from './line-up.ts';
import type { LineUpRow } from './line-up.ts';
import type { MethodsText } from './methods-text.ts';
import { quantityText, withError, withInterval } from './number-text.ts';
import { htmlList, htmlPage, htmlTable, scrolling } from './report-html.ts';
import { escapeXml } from './svg.ts';
import { chi2Text, deltaAicText, deltaLnEvidenceText, neighboursText, ranked } from './table.ts';

/** One parameter of a fitted hypothesis. Numbers in `unit`. */
export interface ReportParameter {
  readonly name: string;
  readonly unit: string;
  readonly value: number;
  /** One standard deviation, or the two sides of an interval; neither where it was held fixed. */
  readonly error?: number;
  readonly below?: number;
  readonly above?: number;
  /** What was allowed, such as `0 to 6 µG` or `fixed`. */
  readonly allowed: string;
  readonly meaning?: string;
}

export interface ReportHypothesis {
  readonly name: string;
  readonly chi2PerN: number;
  readonly deltaAic: number;
  /** Natural logarithm of the evidence above the best's, from nested sampling. */
  readonly deltaLnEvidence?: number;
  readonly deltaLnEvidenceError?: number;
  /** Correlation of neighbouring whitened residuals, with one standard deviation. */
  readonly neighbours?: number;
  readonly neighboursError?: number;
  /** Where the data tell it from the best. */
  readonly decidedBy?: string;
  /** A sentence under its column, such as what symmetry forbids it. */
  readonly verdict: string;
  readonly parameters: readonly ReportParameter[];
  /** Models it is made of, each with its published source. */
  readonly sources: readonly { readonly model: string; readonly source: string }[];
}

/** One set of data and all that was taken for granted about it. */
export interface ReportData {
  readonly quantity: string;
  readonly file: string;
  /** Such as frequency, beam, noise, number of pixels. */
  readonly about: string;
  readonly assumed: readonly string[];
}

export interface Report {
  readonly title: string;
  readonly question: string;
  /** The plain sentence: which hypothesis the data prefer, and how strongly. */
  readonly answer: string;
  /** A sentence per pair of hypotheses. */
  readonly pairs?: readonly string[];
  readonly data: readonly ReportData[];
  /** In the order of the columns. */
  readonly hypotheses: readonly ReportHypothesis[];
  /** Maps and profiles; the row of verdicts is added. */
  readonly lineUp: readonly LineUpRow[];
  /** Sentences under the line-up: what lines, rings and hatching mean. */
  readonly legend: readonly string[];
  readonly caveats: readonly string[];
  readonly methods: MethodsText;
  /** Such as version, seed and the command that makes the page again. */
  readonly provenance: readonly string[];
}

/**
 * The report as one HTML page that needs nothing beside it: no scripts, fonts or pictures from
 * elsewhere; light or dark as the reader prefers. The same input gives the same bytes.
 */
export function reportHtml(report: Report): string {
  const { hypotheses } = report;
  const names = hypotheses.map((one) => one.name);
  const verdicts: LineUpRow[] = [
    { kind: 'words', label: 'χ²/N, Δ AIC', models: hypotheses.map((one) => `χ²/N ${chi2Text(one.chi2PerN)}, Δ AIC ${deltaAicText(one.deltaAic)}`) },
    { kind: 'words', label: 'verdict', models: hypotheses.map((one) => one.verdict) },
  ];
  const lineUp = lineUpTable(names, [...report.lineUp, ...verdicts], report.legend.join(' '));
  return htmlPage(report.title, [
    `<header><h1>${escapeXml(report.title)}</h1><p class="question">${escapeXml(report.question)}</p></header>`,
    '<main>',
    section('The answer', `<p class="answer">${escapeXml(report.answer)}</p>${rankingHtml(hypotheses)}${htmlList(report.pairs ?? [])}`),
    section('Line-up', scrolling('Line-up of hypotheses', lineUp)),
    section('Parameters', scrolling('Parameters', hypotheses.map(parametersHtml).join('\n'))),
    section('Data', scrolling('Data', dataHtml(report.data))),
    report.caveats.length ? section('Caveats', htmlList(report.caveats)) : '',
    section('Methods', `<p>${escapeXml(report.methods.paragraph)}</p>${htmlList(report.methods.citations)}`),
    '</main>',
    report.provenance.length ? `<footer><h2>How to make this again</h2>${htmlList(report.provenance)}</footer>` : '',
  ].filter(Boolean).join('\n'));
}

function section(heading: string, html: string): string {
  return `<section><h2>${heading}</h2>${html}</section>`;
}

function rankingHtml(hypotheses: readonly ReportHypothesis[]): string {
  const evidence = hypotheses.some((one) => one.deltaLnEvidence !== undefined);
  const white = hypotheses.some((one) => one.neighbours !== undefined);
  const rows = ranked(hypotheses).map((one, k) => [
    `${k + 1}. ${one.name}`,
    chi2Text(one.chi2PerN),
    ...(white ? [neighboursText(one)] : []),
    deltaAicText(one.deltaAic),
    ...(evidence ? [deltaLnEvidenceText(one)] : []),
    one.decidedBy ?? '',
  ]);
  const headings = ['hypothesis', 'χ²/N', ...(white ? ['neighbours'] : []), 'Δ AIC', ...(evidence ? ['Δ ln Z'] : []), 'decided by'];
  const caption = `Hypotheses from best to worst; Δ is counted from the best.${white ? ' Neighbours: the correlation of whitened residuals a beam apart, 0 where noise alone is left.' : ''}`;
  return htmlTable(caption, headings, rows, headings.map((_, k) => k).slice(1, -1));
}

function parametersHtml(one: ReportHypothesis): string {
  const rows = one.parameters.map((parameter) => [parameter.name, valueText(parameter), parameter.allowed, parameter.meaning ?? '']);
  const sources = one.sources.map(({ model, source }) => `${model}: ${source}`);
  const table = rows.length
    ? htmlTable(`Best values of “${one.name}”`, ['parameter', 'best value', 'allowed', 'meaning'], rows, [1])
    : '<p class="soft">No free parameters.</p>';
  return `<h3>${escapeXml(one.name)}</h3>${table}${htmlList(sources)}`;
}

function valueText({ value, error, below, above, unit }: ReportParameter): string {
  if (below !== undefined && above !== undefined) return withInterval(value, below, above, unit);
  return error === undefined ? quantityText(value, unit, 4) : withError(value, error, unit);
}

function dataHtml(data: readonly ReportData[]): string {
  const rows = data.map((one) => [one.quantity, one.file, one.about, { html: htmlList(one.assumed) || 'nothing' }]);
  return htmlTable('What the hypotheses were compared with, and what was assumed about it.', ['quantity', 'file', 'about', 'assumed'], rows);
}
