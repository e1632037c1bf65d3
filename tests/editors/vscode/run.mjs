// The client for Visual Studio Code in the real editor, with the real server.
//
//   node run.mjs PROGRAM [FOLDER] [--screenshot] [--keep]
//
// PROGRAM is `leastwise`, FOLDER what install.sh has filled. --screenshot puts a picture into editors/vscode; --keep leaves
// the temporary folder. Pictures of what was seen lie in FOLDER/shots. Prints `not run: …` where the editor is not there.

import { execFileSync } from 'node:child_process';
import fs from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { Editor, chromium, until } from './editor.mjs';
import { checkGrammar } from './grammar.mjs';
import { checkProgram } from './program.mjs';

const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '../../..');
const client = path.join(root, 'editors/vscode');
const flags = process.argv.slice(2).filter((word) => word.startsWith('--'));
const [program, folder = path.join(process.env.CARGO_TARGET_DIR ?? path.join(root, 'target'), 'editors/vscode')] =
  process.argv.slice(2).filter((word) => !word.startsWith('--')).map((word) => path.resolve(word));

function notRun(why) {
  console.log(`not run: Visual Studio Code (${why})`);
  process.exit(0);
}

if (program === undefined || !fs.existsSync(program)) {
  console.error('usage: node run.mjs PROGRAM [FOLDER] [--screenshot] [--keep]');
  process.exit(2);
}
if (process.platform !== 'linux') {
  notRun('the test needs Linux');
} else if (!fs.existsSync(path.join(folder, 'installed'))) {
  notRun('install.sh has not installed it');
} else if (chromium() === undefined) {
  notRun('there is no Chromium');
} else if (!fs.existsSync(path.join(client, 'node_modules/.bin/esbuild'))) {
  notRun('the tools of editors/vscode are not installed');
}

let passed = 0, failed = 0;
const begun = Date.now();
function report(name, wrong) {
  const seconds = `${((Date.now() - begun) / 1000).toFixed(1)} s`;
  wrong === undefined ? passed++ : failed++;
  console.log(wrong === undefined ? `PASS ${name} (${seconds})` : `FAIL ${name} (${seconds}): ${wrong}`);
}

const shots = path.join(folder, 'shots');
fs.mkdirSync(shots, { recursive: true });
let editor;

/** One thing that a person does; what goes wrong in it is told and does not end the others. */
async function check(name, doing) {
  try {
    await doing();
    report(name);
  } catch (error) {
    report(name, String(error.message).split('\n')[0]);
    await editor?.page?.screenshot({ path: path.join(shots, `failed-${failed}.png`) }).catch(() => undefined);
    await editor?.press('Escape', 'Escape', 'Escape').catch(() => undefined);
  }
}

function expect(right, otherwise) {
  if (!right) {
    throw new Error(otherwise);
  }
}

// What the words alone give.
let texts = 0;
const colourless = [];
await checkGrammar(folder, (name, wrong) => { texts++; if (wrong !== undefined) { colourless.push(`${name}: ${wrong}`); } });
report(`${texts} texts have their colours before the server speaks`, colourless.length > 0 ? colourless.join('; ') : undefined);

// A model with one claim that does not hold, in a folder of its own; the program on the PATH.
const temporary = fs.realpathSync(fs.mkdtempSync(path.join(os.tmpdir(), 'leastwise-vscode-')));
const workspace = path.join(temporary, 'models');
const file = path.join(workspace, 'shaft_winch.least');
const binary = path.join(temporary, 'bin/leastwise');
fs.mkdirSync(workspace);
fs.mkdirSync(path.dirname(binary));
fs.symlinkSync(program, binary);
const text = fs.readFileSync(path.join(root, 'grammar/examples/shaft_winch.least'), 'utf8');
// The comment at the head is not needed here; the whole model fits on the screen.
const model = text.slice(text.indexOf('system')).replace(/broken (symmetry drop: r -> r \+ ε).*/, '$1');
for (const needed of ['sin(θ)^2', '\nsymmetry drop', 'coordinate r: length', "(r'/a)^2"]) {
  expect(model.includes(needed), `the example has changed: it has no ${needed.trim()}`);
}
fs.writeFileSync(file, model);

/** Line and column, from one, of a piece of the model. */
function place(start, piece) {
  const lines = model.split('\n');
  const at = lines.findIndex((each) => each.startsWith(start));
  return [at + 1, lines[at].indexOf(piece) + 1];
}
const hinted = (all) => /coordinate φ: angle[^\n]*φ̇/.test(all);

/** The server processes of this test. */
function servers() {
  return fs.readdirSync('/proc').filter((id) => {
    try {
      return /^[0-9]+$/.test(id) && fs.readFileSync(`/proc/${id}/cmdline`, 'utf8').startsWith(`${binary}\0lsp`);
    } catch {
      return false;
    }
  });
}

try {
  checkProgram(client, path.join(temporary, 'places'), report);
  execFileSync('npm', ['run', '--silent', 'package'], { cwd: client, stdio: 'pipe' });
  report('the client is packaged');
  editor = await Editor.open({
    folder, vsix: path.join(client, 'leastwise.vsix'), temporary, workspace, file,
    environment: { PATH: `${path.dirname(binary)}${path.delimiter}${process.env.PATH}` },
  });
  report('the editor shows the model');
  await session();
} catch (error) {
  report('the editor', error.stderr?.length > 0 || error.stdout?.length > 0 ? `${error.message} ${error.stdout}${error.stderr}` : error.message);
} finally {
  await editor?.close();
}
if (flags.includes('--keep') || failed > 0) {
  console.log(`kept: ${temporary}`);
} else {
  fs.rmSync(temporary, { recursive: true, force: true });
}
console.log(`${passed} passed, ${failed} failed`);
process.exit(failed > 0 ? 1 : 0);

async function session() {
  const { page } = editor;
  const shoot = (name) => page.screenshot({ path: path.join(shots, `${name}.png`), animations: 'disabled', caret: 'initial' });
  const squiggles = (kind) => editor.model.locator(`.squiggly-${kind}`);

  await check('a coordinate has its momentum behind it', async () => {
    await editor.linesWith('the hint of φ is there', hinted);
    await editor.linesWith('a long hint is whole', (all) => all.includes('3 degrees of freedom, energy not conserved: bearing, brake'));
    expect((await squiggles('error').count()) === 0, 'there is an error');
  });

  await check('a claim that does not hold has a squiggle', async () => {
    await squiggles('warning').first().waitFor();
    await editor.linesWith('the hint says why', (all) => /symmetry drop[^\n]*broken by package, weight/.test(all));
  });

  await check('the server colours coordinates and parameters', async () => {
    await until('m and r differ', async () => {
      const pieces = await editor.colours('dissipation');
      const of = (word) => pieces.find(([piece]) => piece.trim() === word)?.[1];
      return of('c') !== undefined && of('r') !== undefined && of('c') !== of('r');
    });
  });

  await check('a hover shows the equation of motion', async () => {
    await editor.model.locator('.view-line').filter({ hasText: 'coordinate φ' }).locator('span > span').filter({ hasText: 'φ' }).first().hover();
    const hover = page.locator('.monaco-hover:visible').filter({ hasText: 'φ̈' }).first();
    await hover.waitFor();
    await until('its formula has several colours', async () => {
      const colours = await hover.locator('.monaco-tokenized-source span').evaluateAll((all) => all.map((span) => getComputedStyle(span).color));
      return new Set(colours).size > 1;
    });
    await shoot('hover');
    if (flags.includes('--screenshot')) {
      fs.copyFileSync(path.join(shots, 'hover.png'), path.join(client, 'screenshot.png'));
    }
    await page.mouse.move(900, 650);
  });

  await check('a slip has a squiggle, and the hints stay', async () => {
    const [row] = place('conserved spin', '');
    await editor.caret(row, 1);
    await editor.press('Control+Shift+K');
    await editor.type("conserved spin = m r^2 sin θ^2 φ'\n");
    await editor.linesWith('the slip is made', (all) => all.includes('m r^2 sin θ^2'));
    await squiggles('error').first().waitFor();
    expect((await squiggles('error').count()) === 1, `there are ${await squiggles('error').count()} squiggles`);
    expect(hinted((await editor.lines()).join('\n')), 'the hints are gone');
  });

  await check('the sheet stands beside the model', async () => {
    await editor.caret(1, 1);
    await editor.command('Leastwise: Show the Sheet');
    const sheet = page.locator('.monaco-editor[data-uri^="leastwise-sheet:"]');
    await editor.linesWith('the sheet is shown', (all) => all.includes('Lagrangian') && all.includes('φ̇²'), sheet);
    await shoot('sheet');
  });

  await check('a completion is accepted', async () => {
    await editor.caret(...place('kinetic   package', ''));
    await editor.press('End', 'Enter');
    await page.keyboard.type('kinetic extra = 1/2 J \\the', { delay: 5 });
    const row = page.locator('.suggest-widget.visible .monaco-list-row').filter({ hasText: 'θ' }).first();
    await row.waitFor();
    await shoot('completion');
    await editor.press('Tab');
    await page.keyboard.type("'^2");
    await editor.linesWith('θ is put in', (all) => all.includes("kinetic extra = 1/2 J θ'^2"));
  });

  await check('the sheet follows the model', async () => {
    const sheet = page.locator('.monaco-editor[data-uri^="leastwise-sheet:"]');
    await editor.linesWith('the new term is in the sheet', (all) => all.includes('kinetic   extra'), sheet);
  });

  await check('a mend is applied', async () => {
    const [row, column] = place('conserved spin', '(θ)');
    await editor.caret(row + 1, column + 2);
    await editor.press('Control+.');
    await page.locator('.action-widget .monaco-list-row').filter({ hasText: 'sin(θ)^2' }).first().waitFor();
    await shoot('mend');
    // The list takes no clicks for a moment, so keys choose.
    const focused = page.locator('.action-widget .monaco-list-row.focused');
    for (let tries = 0; tries < 5 && !(await focused.innerText()).includes('sin(θ)^2'); tries++) {
      await editor.press('ArrowDown');
    }
    await editor.press('Enter');
    await editor.linesWith('the text is mended', (all) => all.includes('m r^2 sin(θ)^2'));
    await squiggles('error').first().waitFor({ state: 'detached' });
  });

  await check('a name is renamed everywhere', async () => {
    await editor.caret(...place('coordinate r', 'r:'));
    await editor.press('F2');
    const box = page.locator('.rename-box input');
    await box.waitFor();
    await box.fill('ρ');
    await editor.press('Enter');
    await editor.linesWith('all r are ρ', (all) =>
      ['coordinate ρ', "(ρ'/a)^2", 'm ρ^2 sin(θ)^2', 'ρ -> ρ + ε', 'brake on ρ', 'from ρ = 30 m'].every((piece) => all.includes(piece)) &&
      !/(?<!\p{L})r(?!\p{L})/u.test(all.replaceAll(/#[^\n]*/g, '')));
  });

  await check('brackets are closed, and a line that goes on is indented', async () => {
    await editor.press('Control+End', 'Enter');
    try {
      // As fast as a hand, no faster: a bar is closed only where the editor knows already that this is no comment.
      await page.keyboard.type('let Q = ', { delay: 50 });
      await page.waitForTimeout(500);
      await page.keyboard.type('|P +', { delay: 50 });
      await editor.press('Escape', 'Enter');
      await page.keyboard.type('P', { delay: 50 });
      await editor.linesWith('the second line is indented, the bar closed', (all) => all.includes('\nlet Q = |P +\n    P|'));
    } finally {
      // Whatever came of it, the next checks find the model as it was.
      await editor.press('Escape', 'Control+Shift+K', 'Control+Shift+K');
      await editor.caret(1, 1);
    }
  });

  await check('a server that is killed comes back', async () => {
    const [old] = servers();
    expect(old !== undefined && servers().length === 1, `there are ${servers().length} servers`);
    process.kill(Number(old), 'SIGKILL');
    await until('another server runs', () => servers().some((id) => id !== old));
    await editor.caret(...place('kinetic   package', ''));
    await editor.press('End', 'Enter');
    await page.keyboard.type('kinetic more = 1/2 J ω^2');
    await squiggles('error').first().waitFor();
    await editor.press('Control+Shift+K');
    await squiggles('error').first().waitFor({ state: 'detached' });
    expect(servers().length === 1, `there are ${servers().length} servers`);
  });

  await check('a setting reaches the server at once', async () => {
    editor.set({ 'leastwise.hints.momentum': false });
    await editor.linesWith('the hint is gone', (all) => all.includes('coordinate φ') && !hinted(all));
    editor.set({});
    await editor.linesWith('the hint is back', hinted);
  });

  await check('a path without a program is told', async () => {
    editor.set({ 'leastwise.server.path': '~/no such folder/leastwise' });
    const toast = await editor.message('there is no program there');
    for (const button of ['Open the Setting', 'How to Install']) {
      expect((await toast.getByRole('button', { name: button }).count()) === 1, `there is no button ${button}`);
    }
    await shoot('no-server');
    await until('the old server has ended', () => servers().length === 0);
    await toast.getByRole('button', { name: 'How to Install' }).click();
    const preview = page.locator('.tab').filter({ hasText: /Preview readme/i });
    await preview.locator('.codicon-close').click();
    await editor.linesWith('the model is seen again', (all) => all.includes('coordinate φ'));
  });

  await check('a program that ends at once is told, and restarts when it is asked to', async () => {
    editor.set({ 'leastwise.server.path': '/bin/false' });
    const toast = await editor.message('The server has ended unexpectedly 5 times');
    await shoot('stopped');
    expect((await toast.getByRole('button', { name: 'Restart' }).count()) === 1, 'there is no button');
    editor.set({ 'leastwise.server.path': '${workspaceFolder}/../bin/leastwise' });
    await until('the server runs', () => servers().length === 1);
    await editor.linesWith('the hints are back', hinted);
  });
}
