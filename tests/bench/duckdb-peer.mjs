// The peer of the tally where Python is not to be had: the same counts by DuckDB alone.
import { readFileSync } from 'node:fs';
import { DuckDBInstance } from '@duckdb/node-api';

const [events, edgesPath] = process.argv.slice(2);
const edges = JSON.parse(readFileSync(edgesPath, 'utf8'));
const place = (column, list) => `list_sum(list_transform([${list.join(', ')}], edge -> (${column} >= edge)::int))`;
const connection = await (await DuckDBInstance.create(':memory:')).connect();
const rows = await connection.runAndReadAll(
  `select ${place('t', edges.true)} as j, ${place('r', edges.reconstructed)} as k, count(*) from read_csv('${events}') where quality >= 1 group by all`,
);
console.log(rows.currentRowCount);
