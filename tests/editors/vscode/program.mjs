// How the client finds the program, without an editor.

import { execFileSync } from 'node:child_process';
import fs from 'node:fs';
import { createRequire } from 'node:module';
import path from 'node:path';

/** Looks for the program in made-up places below `temporary`; `report(name, wrong)` gets a text where something is wrong. */
export function checkProgram(client, temporary, report) {
  const bundle = path.join(temporary, 'program.cjs');
  execFileSync(path.join(client, 'node_modules/.bin/esbuild'), [
    path.join(client, 'src/program.ts'), '--bundle', '--platform=node', '--format=cjs', '--log-level=error', `--outfile=${bundle}`,
  ]);
  const { findProgram } = createRequire(bundle)(bundle);

  const put = (file, mode = 0o755) => {
    const whole = path.join(temporary, file);
    fs.mkdirSync(path.dirname(whole), { recursive: true });
    fs.writeFileSync(whole, '', { mode });
    return whole;
  };
  const onPath = put('path/leastwise');
  const bundled = put('extension/server/leastwise');
  const own = put('home/tools/leastwise');
  const inFolder = put('folder/target/leastwise');
  put('folder/notes', 0o644);
  const old = { PATH: process.env.PATH, HOME: process.env.HOME };
  process.env.PATH = `${path.dirname(onPath)}${path.delimiter}${temporary}`;
  process.env.HOME = path.join(temporary, 'home');

  const check = (name, expected, setting, more = {}) => {
    const found = findProgram({
      setting, folders: [path.join(temporary, 'folder')], extension: path.join(temporary, 'extension'), ...more,
    });
    const right = expected instanceof RegExp ? found.path === undefined && expected.test(found.why) : found.path === expected;
    report(`the program: ${name}`, right ? undefined : JSON.stringify(found));
  };
  try {
    check('the setting comes first', own, own);
    check('~ is the home folder', own, '~/tools/leastwise');
    check('${workspaceFolder} is the open folder', inFolder, '${workspaceFolder}/target/leastwise');
    check('a relative path begins in the open folder', inFolder, 'target/leastwise');
    check('a bare name is looked up on the PATH', onPath, 'leastwise');
    check('then the one in the extension', bundled, ' ');
    check('then the one on the PATH', onPath, '', { extension: temporary });
    check('a wrong setting is told and not passed over', /`~\/nothing`, and there is no program there/, '~/nothing');
    check('a file that may not be run is no program', /no program there/, '${workspaceFolder}/notes');
    check('a folder is no program', /no program there/, '~/tools');
    check('a setting that needs a folder', /no folder is open/, '${workspaceFolder}/x', { folders: [] });
    process.env.PATH = temporary;
    check('none anywhere', /not found/, '', { extension: temporary });
  } finally {
    Object.assign(process.env, old);
  }
}
