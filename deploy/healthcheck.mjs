/**
 * Is the worker of this host alive? Asked by container engines (HEALTHCHECK, livenessProbe), inside the worker's container.
 *
 * A worker reports itself to Redis every few seconds from the loop that renews its jobs, so a report that has gone stale means a loop
 * that hangs. Where Redis itself is away, workers wait for it and must not be killed meanwhile: that counts as healthy.
 *
 * Usage: node deploy/healthcheck.mjs, with the worker's environment
 * Exit status: 0 the worker reports, or nothing can be said; 1 Redis knows of no recent report from this host; 2 wrong settings
 */
import { readFileSync } from 'node:fs';
import { hostname } from 'node:os';
import { readSettings } from '../dist/src/core/settings.js';
import { connect, connectFirst, describeServer } from '../dist/src/queue/bullmq/redis-connection.js';
import { redisWorkerRegistry } from '../dist/src/queue/bullmq/worker-registry.js';

/** Seconds; several times the pause between two reports. */
const STALE = 30;
/** Milliseconds for an answer; engines give this check 15 s. */
const PATIENCE_MS = 8_000;

async function check(settings) {
  if (settings.redis === null) return [0, 'REDIS_URL is not set, so there is no worker to ask for'];
  const server = { url: settings.redis, ...(settings.redis_ca === null ? {} : { ca: readFileSync(settings.redis_ca, 'utf8') }) };
  const where = describeServer(server);
  const client = connect(server, 'a-moment');
  try {
    await connectFirst(client, where);
    const workers = await redisWorkerRegistry(client, settings.redis_prefix, where).list();
    const ages = workers.filter(({ host }) => host === hostname()).map(({ age }) => age);
    if (ages.length === 0) return [1, `no worker of ${hostname()} reports to ${where}`];
    const age = Math.min(...ages);
    return [age > STALE ? 1 : 0, `the last report of ${hostname()} is ${age.toFixed(1)} s old`];
  } catch (error) {
    return [0, `nothing can be said: ${error.message}`];
  } finally {
    client.disconnect();
  }
}

function end(status, text) {
  console.log(text);
  process.exit(status);
}

let settings;
try {
  settings = readSettings(process.env);
} catch (error) {
  end(2, error.message);
}
setTimeout(() => end(0, `nothing can be said: no answer within ${PATIENCE_MS / 1000} s`), PATIENCE_MS).unref();
end(...(await check(settings)));
