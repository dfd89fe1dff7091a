/**
 * Manifests against the object types of the Kubernetes API, as the package kubernetes-types generates them from the API's published
 * description: each manifest becomes a literal of its type, and the compiler finds misspelt keys, missing ones and wrong kinds of
 * value. (The JSON schemas of the same description let unknown keys pass.)
 */
import { createRequire } from 'node:module';
import { join } from 'node:path';
import ts from 'typescript';
import { REPOSITORY } from './read-deploy.js';

export interface Manifest {
  readonly apiVersion: string;
  readonly kind: string;
  readonly [key: string]: unknown;
}

const packageFolder = join(createRequire(import.meta.url).resolve('kubernetes-types/package.json'), '..');

/** apps/v1 → kubernetes-types/apps/v1; v1 → kubernetes-types/core/v1 */
function moduleOf(apiVersion: string): string {
  const [group, version] = apiVersion.includes('/') ? apiVersion.split('/') : ['core', apiVersion];
  return join(packageFolder, group.split('.')[0], `${version}.d.ts`);
}

/** What is wrong with the manifests, a line each. */
export function checkManifests(manifests: readonly Manifest[]): string[] {
  const file = join(REPOSITORY, 'manifests.check.ts');
  const source = manifests
    .map(({ apiVersion, kind, ...rest }, index) => {
      const type = `import(${JSON.stringify(moduleOf(apiVersion))}).${kind}`;
      return `export const manifest${index}: ${type} = ${JSON.stringify({ apiVersion, kind, ...rest })};`;
    })
    .join('\n');
  const options: ts.CompilerOptions = { strict: true, noEmit: true, skipLibCheck: true, types: [], lib: ['lib.es5.d.ts'] };
  const host = ts.createCompilerHost(options);
  const fromDisk = host.getSourceFile.bind(host);
  host.getSourceFile = (name, target, ...more) =>
    name === file ? ts.createSourceFile(name, source, target) : fromDisk(name, target, ...more);
  const program = ts.createProgram([file], options, host);
  return ts.getPreEmitDiagnostics(program).map(({ messageText }) => ts.flattenDiagnosticMessageText(messageText, ' '));
}
