// Finds the program `leastwise`: the setting, then the one inside the extension, then the PATH. Knows nothing of the editor.

import * as fs from 'node:fs';
import * as os from 'node:os';
import * as path from 'node:path';

/** Where to look. */
export interface Places {
  /** `leastwise.server.path` as it is written; empty where nothing is set. */
  setting: string;
  /** The folders that are open; the first is `${workspaceFolder}`. */
  folders: readonly string[];
  /** The folder of the extension. */
  extension: string;
}

/** The program's path, or why there is none. */
export type Found = { path: string; from: 'setting' | 'extension' | 'PATH' } | { path: undefined; why: string };

/** Looks for the program. What is set is never passed over for another one. */
export function findProgram(places: Places): Found {
  const setting = places.setting.trim();
  if (setting !== '') {
    const wanted = expand(setting, places.folders);
    if (wanted === undefined) {
      return { path: undefined, why: `\`leastwise.server.path\` is \`${setting}\`, but no folder is open.` };
    }
    // A bare name is looked up as a shell would.
    const found = /[\\/]/.test(wanted) ? runnable(path.resolve(places.folders[0] ?? os.homedir(), wanted)) : onPath(wanted);
    return found === undefined
      ? { path: undefined, why: `\`leastwise.server.path\` is \`${setting}\`, and there is no program there.` }
      : { path: found, from: 'setting' };
  }
  const bundled = runnable(path.join(places.extension, 'server', 'leastwise'));
  if (bundled !== undefined) {
    return { path: bundled, from: 'extension' };
  }
  const found = onPath('leastwise');
  return found === undefined
    ? { path: undefined, why: 'The program `leastwise` was not found: it is not on the `PATH`, and no setting names it.' }
    : { path: found, from: 'PATH' };
}

/** Puts the home folder for `~` and the first open folder for `${workspaceFolder}`; undefined where none is open. */
function expand(text: string, folders: readonly string[]): string | undefined {
  const home = text === '~' || /^~[\\/]/.test(text) ? os.homedir() + text.slice(1) : text;
  if (!home.includes('${workspaceFolder}')) {
    return home;
  }
  const folder = folders[0];
  return folder === undefined ? undefined : home.replaceAll('${workspaceFolder}', () => folder);
}

function onPath(name: string): string | undefined {
  for (const folder of (process.env['PATH'] ?? '').split(path.delimiter)) {
    const found = folder === '' ? undefined : runnable(path.join(folder, name));
    if (found !== undefined) {
      return found;
    }
  }
  return undefined;
}

/** The file itself, or with `.exe` behind its name, if it may be run. */
function runnable(file: string): string | undefined {
  const files = process.platform === 'win32' ? [file, `${file}.exe`] : [file];
  return files.find((candidate) => {
    try {
      fs.accessSync(candidate, fs.constants.X_OK);
      return fs.statSync(candidate).isFile();
    } catch {
      return false;
    }
  });
}
