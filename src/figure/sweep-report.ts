import type { Crossing } from '../sweep/crossings.ts';
import type { SweepImportance, SweepReading } from '../sweep/reading.ts';
import type { SweepPlan } from '../sweep/types.ts';
import type { MethodsText } from './methods-text.ts';
import { htmlList, htmlPage, htmlTable, scrolling } from './report-html.ts';
import { escapeXml } from './svg.ts';
import { rangeText } from './sweep-axis.ts';

/** What the report of a sweep shows; pictures are SVG text. */
export interface SweepReport {
  readonly plan: SweepPlan;
  readonly reading: SweepReading;
  readonly crossings: readonly Crossing[];
  readonly importance: readonly SweepImportance[];
  readonly strip?: string;
  readonly curves: readonly string[];
  readonly heat?: string;
  readonly bars?: string;
  readonly methods: MethodsText;
  readonly provenance: readonly string[];
  readonly rows: number;
}

/** The report of a sweep as one page that needs nothing beside it. */
export function sweepReportHtml(report: SweepReport): string {
  const { plan, crossings, importance } = report;
  const figure = (name: string, svg: string | undefined): string => (svg === undefined ? '' : section(name, scrolling(name, svg)));
  return htmlPage(plan.title || 'Sweep', [
    `<header><h1>${escapeXml(plan.title || 'Sweep')}</h1><p class="question">${escapeXml(`${report.rows} rows: ${plan.variants.map(({ name }) => name).join(', ')}`)}</p></header>`,
    '<main>',
    section('What would be seen', seenHtml(plan, crossings)),
    figure('Maps along the way', report.strip),
    report.curves.length === 0 ? '' : section('Curves', `${report.curves.map((svg, k) => scrolling(`Curves against ${plan.axes[k].path}`, svg)).join('\n')}<p class="soft">${escapeXml(bandWords(plan))}</p>`),
    figure('Two quantities at once', report.heat),
    report.bars === undefined ? section('What matters', `<p>${escapeXml(noIndicesWords(plan))}</p>`) : section('What matters', `${scrolling('What matters', report.bars)}${importanceHtml(report, importance)}`),
    section('What was varied', scrolling('What was varied', variedHtml(plan))),
    section('Measures', scrolling('Measures', htmlTable('Columns of sweep.csv and sweep.parquet.', ['column', 'unit', 'meaning'], report.reading.columns.map(({ name, unit, description }) => [name, unit, description])))),
    section('Methods', `<p>${escapeXml(report.methods.paragraph)}</p>${htmlList(report.methods.citations)}`),
    '</main>',
    `<footer><h2>How to make this again</h2>${htmlList(report.provenance)}</footer>`,
  ].filter(Boolean).join('\n'));
}

function section(heading: string, html: string): string {
  return `<section><h2>${heading}</h2>${html}</section>`;
}

function seenHtml(plan: SweepPlan, crossings: readonly Crossing[]): string {
  if (crossings.length === 0) return '<p>Where the asymmetry would be seen is not told: the sweep measures no detectability.</p>';
  const seen = crossings.filter(({ intervals }) => intervals.length > 0).map(({ sentence }) => sentence);
  const rest = crossings.length - seen.length;
  return `${htmlList(seen)}${rest > 0 ? `<p class="soft">${escapeXml(`${rest} of ${crossings.length} asymmetries stay below ${plan.threshold}σ or cannot be told.`)}</p>` : ''}`;
}

function bandWords({ realisations, axes }: SweepPlan): string {
  const else_ = [...(axes.length > 1 ? ['everything else that was varied'] : []), ...(realisations > 0 ? [`${realisations} realisations`] : [])];
  const scatter = else_.length > 0 ? `Bands are the scatter over ${else_.join(' and ')}` : 'Bands are the standard error that the noise makes';
  return `${scatter}. Beyond 75° from face-on a ring cannot be deprojected: the asymmetries are then taken from boxes beside the axes, and harmonics are blank.`;
}

function noIndicesWords({ axes, design }: SweepPlan): string {
  if (axes.length < 2) return 'One quantity was varied, so nothing is to be shared out.';
  return design === 'sobol' ? 'Shares of the variance need `design: sensitivity` (Saltelli et al. 2010), or a grid.' : 'The grid is too large for its shares of the variance to be kept in memory; `design: sensitivity` gives them.';
}

function importanceHtml({ plan, reading }: SweepReport, importance: readonly SweepImportance[]): string {
  const text = (value: number, error: number): string => (!Number.isFinite(value) ? '—' : error > 0 ? `${value.toFixed(3)} ± ${error.toFixed(3)}` : value.toFixed(3));
  const rows = importance.flatMap(({ variant, column, indices }) =>
    indices.map(({ first, firstError, total, totalError }, k) => [
      `${reading.columns[column].label}${plan.variants.length > 1 ? `, ${plan.variants[variant].name}` : ''}`, plan.axes[k].path, text(first, firstError), text(total, totalError),
    ]),
  );
  const how = plan.design === 'grid' ? 'Exact for this grid (analysis of variance).' : 'Sobol indices from the design of Saltelli et al. 2010, errors by jackknife over blocks of samples.';
  return `<details><summary>The numbers</summary>${scrolling('Indices', htmlTable(how, ['measure', 'quantity', 'first order', 'total'], rows, [2, 3]))}</details>`;
}

function variedHtml(plan: SweepPlan): string {
  const rows = [
    ...(plan.variants.length > 1 ? [['scene', plan.variants.map(({ name }) => name).join('; '), '']] : []),
    ...plan.axes.map((axis) => [axis.path, rangeText(axis, plan.design === 'grid'), axis.meaning]),
  ];
  const design = plan.design === 'grid' ? 'A full grid' : plan.design === 'sobol' ? `${plan.samples} scrambled Sobol points, seed ${plan.seed}` : `${plan.samples} base samples of scrambled Sobol points, seed ${plan.seed}, and their mixtures`;
  return htmlTable(`${design}${plan.realisations > 0 ? `; ${plan.realisations} realisations each` : ''}. Ring from ${plan.ring.innerKpc} to ${plan.ring.outerKpc} kpc.`, ['quantity', 'values', 'meaning'], rows);
}
