/**
 * The same samples as a Parquet file, one row a sample, and the same aggregate measures asked of DuckDB over it.
 * Usage: duckdb.mjs make DATASET OUT | duckdb.mjs ask FILE THREADS
 */
import { createRequire } from "node:module";
import { DuckDBInstance } from "@duckdb/node-api";

const [, , what, ...words] = process.argv;

const MEASURES = [
  `SELECT antenna1, antenna2, channel, polarization, count(*) AS samples,
     count(*) FILTER (weight <= 0) AS flagged,
     median(sqrt(re * re + im * im)) FILTER (weight > 0) AS amplitude,
     mad(sqrt(re * re + im * im)) FILTER (weight > 0) AS spread
   FROM vis GROUP BY ALL`,
  `SELECT antenna1, antenna2, time, polarization, avg(re) FILTER (weight > 0) AS re, avg(im) FILTER (weight > 0) AS im,
     sum(weight) FILTER (weight > 0) AS weight, max(abs(w)) AS w
   FROM vis GROUP BY ALL`,
  `SELECT channel, polarization, count(*) FILTER (weight <= 0) AS flagged,
     median(sqrt(re * re + im * im)) FILTER (weight > 0) AS amplitude
   FROM vis GROUP BY ALL`,
  `SELECT count(*) AS cells FROM (SELECT DISTINCT round(u * 1.4e9 * 0.02), round(v * 1.4e9 * 0.02) FROM vis)`,
];

const instance = await DuckDBInstance.create(":memory:");
const connection = await instance.connect();
if (what === "ask") {
  const [file, threads] = words;
  await connection.run(`SET threads = ${Number(threads)}`);
  await connection.run(`CREATE VIEW vis AS SELECT * FROM read_parquet('${file}')`);
  for (const sql of MEASURES) {
    const result = await connection.run(`CREATE OR REPLACE TEMP TABLE answer AS ${sql}`);
    await result.getRows();
  }
} else {
  const [dataset, out] = words;
  await make(dataset, out);
}
connection.closeSync();

async function make(path, out) {
  const require = createRequire(import.meta.url);
  const { openDataset } = await import(require.resolve("../../dist/index.js"));
  const dataset = await openDataset(path);
  const { subbands, channels, polarizations } = dataset.shape;
  const size = subbands * channels * polarizations;
  await connection.run(
    `CREATE TABLE vis (time DOUBLE, antenna1 USMALLINT, antenna2 USMALLINT, u DOUBLE, v DOUBLE, w DOUBLE,
       channel USMALLINT, polarization UTINYINT, re FLOAT, im FLOAT, weight FLOAT)`,
  );
  const appender = await connection.createAppender("vis");
  for await (const block of dataset.blocks({ want: "samples" })) {
    for (let row = 0; row < block.rows; row++) {
      for (let i = 0; i < size; i++) {
        const at = row * size + i;
        appender.appendDouble(block.time[row]);
        appender.appendUSmallInt(block.antenna1[row]);
        appender.appendUSmallInt(block.antenna2[row]);
        appender.appendDouble(block.u[row]);
        appender.appendDouble(block.v[row]);
        appender.appendDouble(block.w[row]);
        appender.appendUSmallInt(Math.floor(i / polarizations));
        appender.appendUTinyInt(i % polarizations);
        appender.appendFloat(block.real[at]);
        appender.appendFloat(block.imag[at]);
        appender.appendFloat(block.weight[at]);
        appender.endRow();
      }
    }
  }
  appender.closeSync();
  await connection.run(`COPY vis TO '${out}' (FORMAT parquet, COMPRESSION snappy)`);
}
