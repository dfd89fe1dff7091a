import { readdirSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { parseBytes, readSettings } from '../../../src/core/settings.js';
import { clusterLanes } from '../../../src/cli/compose.js';
import { lanesFor } from '../../../src/queue/lanes.js';
import { checkManifests, type Manifest } from './manifest-types.js';
import { at, readYaml, type Tree } from './read-deploy.js';

const FOLDER = ['deploy', 'kubernetes'] as const;
const files = readdirSync(at(...FOLDER)).filter((name) => name !== 'kustomization.yaml');
const manifests = new Map(files.flatMap((file) => readYaml(...FOLDER, file).map((one) => [file, one as Manifest & Tree] as const)));
const [kustomization] = readYaml(...FOLDER, 'kustomization.yaml') as Tree[];
const pods = [...manifests].flatMap(([file, { kind, spec }]) =>
  kind === 'Deployment' || kind === 'Job' ? [[file, spec.template.spec as Tree] as const] : [],
);
const environmentOf = (container: Tree): Tree[] => container.env;

/** Settings as the container gets them: secrets and limits stand for themselves. */
function settingsOf(container: Tree) {
  return readSettings(
    Object.fromEntries(
      environmentOf(container).map(({ name, value, valueFrom }) => [
        name,
        valueFrom?.secretKeyRef !== undefined
          ? name === 'REDIS_URL'
            ? 'rediss://redis:6379'
            : 'postgresql://writer@postgres/windrow'
          : valueFrom?.resourceFieldRef !== undefined
            ? container.resources.limits.cpu
            : value,
      ]),
    ),
  );
}

describe('manifests', () => {
  it('have the types of the Kubernetes API', () => {
    expect(checkManifests([...manifests.values()])).toEqual([]);
  });

  it('would be refused with a misspelt key, a wrong value or a missing field', () => {
    const worker = structuredClone(manifests.get('worker.yaml')!);
    const [container] = worker.spec.template.spec.containers;
    container.livenesProbe = container.livenessProbe;
    const migrate = structuredClone(manifests.get('migrate.yaml')!);
    migrate.spec.backoffLimit = 'six';
    const autoscaler = structuredClone(manifests.get('autoscaler.yaml')!);
    delete autoscaler.spec.scaleTargetRef;
    const found = checkManifests([worker, migrate, autoscaler]);
    expect(found).toHaveLength(3);
    for (const [index, key] of ['livenesProbe', 'number', 'scaleTargetRef'].entries()) expect(found[index]).toContain(key);
  });

  it('are all in the kustomization, but the sweep, of which there are many', () => {
    expect([...kustomization.resources, 'sweep.yaml'].sort()).toEqual(files.sort());
    expect(kustomization.images).toMatchObject([{ name: 'windrow' }]);
  });

  it('select the pods they make, and scale a deployment that leaves its number to the autoscaler', () => {
    for (const { kind, spec } of manifests.values())
      if (kind === 'Deployment') expect(spec.template.metadata.labels).toMatchObject(spec.selector.matchLabels);
    const { scaleTargetRef } = manifests.get('autoscaler.yaml')!.spec;
    const target = [...manifests.values()].find(
      ({ kind, metadata }) => kind === scaleTargetRef.kind && metadata.name === scaleTargetRef.name,
    );
    expect(target).toBeDefined();
    expect(target?.spec.replicas).toBeUndefined();
    expect(target?.spec.template.spec.containers[0].resources.requests.cpu).toBeDefined();
  });

  it('hold no secret: URLs come by reference', () => {
    for (const manifest of manifests.values()) expect(manifest.kind).not.toBe('Secret');
    for (const [, { containers }] of pods)
      for (const { name, value, valueFrom } of environmentOf(containers[0]))
        if (name.endsWith('_URL'))
          expect({ value, reference: valueFrom.secretKeyRef.name }).toEqual({ value: undefined, reference: 'windrow' });
    expect(JSON.stringify([...manifests.values()])).not.toMatch(/:\/\//);
  });
});

describe.each(pods)('the pod of %s', (_file, pod) => {
  const container: Tree = pod.containers[0];

  it('runs without rights, as the restricted standard for pods asks', () => {
    // Pod Security Standards, "Restricted" (Kubernetes documentation).
    expect(pod.securityContext).toMatchObject({ runAsNonRoot: true, seccompProfile: { type: 'RuntimeDefault' } });
    expect(container.securityContext).toEqual({
      allowPrivilegeEscalation: false,
      readOnlyRootFilesystem: true,
      capabilities: { drop: ['ALL'] },
    });
    expect(pod.automountServiceAccountToken).toBe(false);
  });

  it('has settings that windrow accepts, and gets no others', () => {
    expect(() => settingsOf(container)).not.toThrow();
    expect(pod.enableServiceLinks).toBe(false);
  });

  it('mounts only volumes it has, and limits its memory', () => {
    const volumes = pod.volumes.map(({ name }: Tree) => name as string);
    for (const { name } of container.volumeMounts) expect(volumes).toContain(name);
    expect(container.resources.limits.memory).toBeDefined();
  });
});

describe.each(pods.filter(([, { containers }]) => containers[0].args[0] === 'worker'))('the worker of %s', (_file, pod) => {
  const container: Tree = pod.containers[0];

  it('serves the lane it names, with memory for all its threads', () => {
    const settings = settingsOf(container);
    const named: string[] = (container.args as string[])
      .join(' ')
      .replace(/^.*--lanes /, '')
      .split(',');
    expect(lanesFor(settings.memory!, clusterLanes(settings), named).map(({ name }) => name)).toEqual(named);
    expect(parseBytes(container.resources.limits.memory.replace(/i$/, ''))!).toBeGreaterThan(settings.memory! * settings.threads!);
  });

  it('is given more time to end than it takes', () => {
    expect(pod.terminationGracePeriodSeconds).toBeGreaterThan(settingsOf(container).grace);
  });
});
