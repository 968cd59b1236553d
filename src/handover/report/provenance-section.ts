import { formatCount } from '../../audit/wording';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import type { Section } from './section';

/** What this report was made from, to the bit. */
export const provenanceSection: Section = { id: 'provenance', title: 'Hashes and seed', body: provenance };

function provenance(source: ReportSource): Markup {
  const { manifest } = source.bundle;
  const audit = source.isSameAudit
    ? 'The audit was worked out again for this report and is the one that the bundle holds.'
    : 'The audit was worked out again for this report and differs from the one that the bundle holds, which another version made: this report shows the new one.';
  return markup`${facts(source)}<p>${audit} <code>entasis verify</code> checks every hash, works out the posterior again, and draws every replica again.</p>
<h3>Event files</h3>${eventFiles(manifest.inputs)}
<h3>Files of the bundle</h3>${bundleFiles(manifest.files)}`;
}

function facts({ bundle, manifestHash }: ReportSource): Markup {
  const { program, seed, blockSize, study, schema } = bundle.manifest;
  const ensemble = `${formatCount(bundle.replicas)} replicas in blocks of ${blockSize}; each column's stream begins anew with every block`;
  return tableOf(
    ['What', 'Is'],
    [
      ['Program', `${program.name} ${program.version}`],
      ['Bundle', schema],
      ['Study fingerprint', hash(study.fingerprint)],
      ['Seed', String(seed)],
      ['Ensemble', ensemble],
      ['SHA-256 of manifest.json', hash(manifestHash)],
    ],
  );
}

const hash = (text: string): Markup => markup`<code>${text}</code>`;

function eventFiles(inputs: ReportSource['bundle']['manifest']['inputs']): Markup {
  if (inputs.length === 0) return markup`<p>None is named.</p>`;
  const rows = inputs.map(({ file, bytes, rows, rejected, sha256 }) => {
    return [file, formatCount(bytes), formatCount(rows), formatCount(rejected), hash(sha256)];
  });
  return tableOf(['File', 'Bytes', 'Rows', 'Rejected', 'SHA-256'], rows, { numeric: [1, 2, 3], kind: 'dense' });
}

function bundleFiles(files: ReportSource['bundle']['manifest']['files']): Markup {
  const rows = Object.entries(files).map(([name, { bytes, sha256 }]) => [name, formatCount(bytes), hash(sha256)]);
  return tableOf(['File', 'Bytes', 'SHA-256'], rows, { numeric: [1], kind: 'dense' });
}
