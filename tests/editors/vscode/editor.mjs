// The editor, driven without a screen: code-server on this machine, shown by Chromium.

import { execFileSync, spawn } from 'node:child_process';
import fs from 'node:fs';
import { createRequire } from 'node:module';
import net from 'node:net';
import path from 'node:path';
import { pathToFileURL } from 'node:url';

/** How long a person might wait for something, in milliseconds. */
const PATIENCE = 15_000;

/** Where Chromium is; undefined where it is not. */
export const chromium = () =>
  ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find((file) => fs.existsSync(file));

const entry = (folder) => path.join(folder, 'node_modules/code-server/out/node/entry.js');

const FLAGS = [
  '--auth', 'none', '--disable-telemetry', '--disable-update-check', '--disable-workspace-trust', '--disable-getting-started-override',
];

const SETTINGS = {
  'workbench.startupEditor': 'none', 'workbench.enableExperiments': false, 'workbench.tips.enabled': false,
  'workbench.colorTheme': 'Default Dark Modern', 'workbench.activityBar.location': 'hidden', 'workbench.layoutControl.enabled': false,
  'window.commandCenter': false, 'chat.commandCenter.enabled': false, 'security.workspace.trust.enabled': false,
  'telemetry.telemetryLevel': 'off', 'update.mode': 'none', 'extensions.autoCheckUpdates': false, 'extensions.autoUpdate': false,
  'extensions.ignoreRecommendations': true, 'editor.minimap.enabled': false, 'editor.hover.delay': 100, 'editor.fontSize': 14, 'editor.fontFamily': "'JetBrains Mono', 'DejaVu Sans Mono', monospace",
  'editor.quickSuggestionsDelay': 10, 'editor.accessibilitySupport': 'off', 'files.autoSave': 'off', 'breadcrumbs.enabled': false,
  'git.enabled': false, 'editor.scrollBeyondLastLine': false, 'editor.stickyScroll.enabled': false, 'editor.renderWhitespace': 'none',
};

/** One editor with one folder open. */
export class Editor {
  /** Installs the extension, starts the server of the editor and opens the file in it. */
  static async open({ folder, vsix, temporary, workspace, file, environment }) {
    const editor = new Editor();
    editor.settingsFile = path.join(workspace, '.vscode/settings.json');
    const user = path.join(temporary, 'data/User');
    fs.mkdirSync(user, { recursive: true });
    fs.writeFileSync(path.join(user, 'settings.json'), JSON.stringify(SETTINGS));
    fs.writeFileSync(path.join(temporary, 'config.yaml'), '');
    editor.set({});
    const places = [
      '--config', path.join(temporary, 'config.yaml'), '--user-data-dir', path.join(temporary, 'data'),
      '--extensions-dir', path.join(temporary, 'extensions'),
    ];
    // As if started from a shell: else the editor asks a login shell for its PATH.
    const env = { ...process.env, ...environment, VSCODE_IPC_HOOK_CLI: '', VSCODE_CLI: '1' };
    execFileSync(process.execPath, [entry(folder), ...places, '--install-extension', vsix], { env, stdio: 'pipe' });

    const port = await freePort();
    const log = fs.openSync(path.join(temporary, 'code-server.log'), 'w');
    editor.process = spawn(process.execPath, [entry(folder), ...places, '--bind-addr', `127.0.0.1:${port}`, ...FLAGS, workspace], {
      env, stdio: ['ignore', log, log],
    });
    await until('the editor answers', async () => (await fetch(`http://127.0.0.1:${port}/healthz`)).ok);

    const require = createRequire(pathToFileURL(path.join(folder, 'package.json')));
    editor.browser = await require('playwright-core').chromium.launch({
      executablePath: chromium(),
      args: ['--no-sandbox', '--disable-gpu', '--disable-quic', '--disable-background-networking', '--disable-component-update'],
    });
    const page = await editor.browser.newPage({ viewport: { width: 1280, height: 650 }, colorScheme: 'dark' });
    editor.page = page;
    page.setDefaultTimeout(PATIENCE);
    const payload = JSON.stringify([['openFile', `vscode-remote://127.0.0.1:${port}${file}`]]);
    await page.goto(`http://127.0.0.1:${port}/?folder=${encodeURIComponent(workspace)}&payload=${encodeURIComponent(payload)}`);
    await page.waitForSelector('.monaco-workbench', { timeout: 30_000 });
    editor.model = page.locator(`.monaco-editor[data-uri^="vscode-remote:"][data-uri$="${path.basename(file)}"]`);
    await editor.model.locator('.view-line').first().waitFor({ timeout: 30_000 });
    await page.keyboard.press('Control+B');
    // Code within sentences is in a font of its own.
    await page.addStyleTag({ content: `* { --monaco-monospace-font: 'JetBrains Mono', monospace !important; }` });
    return editor;
  }

  async close() {
    await this.browser?.close();
    if (this.process !== undefined && this.process.exitCode === null) {
      this.process.kill('SIGTERM');
      await new Promise((done) => {
        this.process.once('exit', done);
        setTimeout(() => { this.process.kill('SIGKILL'); done(); }, 3_000).unref();
      });
    }
  }

  /** Writes the folder's settings; the editor sees the file change. */
  set(settings) {
    fs.mkdirSync(path.dirname(this.settingsFile), { recursive: true });
    fs.writeFileSync(this.settingsFile, JSON.stringify(settings));
  }

  /** What the model's editor shows, hints included, line by line; only what is on the screen. */
  async lines(editor = this.model) {
    const rows = await editor.locator('.view-line').evaluateAll((all) =>
      all.map((row) => [Number.parseFloat(row.style.top), row.textContent.replaceAll('\u00a0', ' ')]));
    return rows.sort((a, b) => a[0] - b[0]).map((row) => row[1]);
  }

  /** Waits until the lines are as wanted, and gives them. */
  linesWith(what, wanted, editor = this.model) {
    return until(what, async () => {
      const lines = await this.lines(editor);
      return wanted(lines.join('\n')) ? lines : undefined;
    });
  }

  /** The pieces of a line with their colours. */
  async colours(piece) {
    const row = this.model.locator('.view-line').filter({ hasText: piece }).first();
    return row.locator('span > span').evaluateAll((all) =>
      all.map((span) => [span.textContent.replaceAll('\u00a0', ' '), getComputedStyle(span).color]));
  }

  /** Puts the caret into the model; both count from one. */
  async caret(line, column) {
    await this.model.locator('textarea.inputarea, .native-edit-context').first().focus();
    await this.page.keyboard.press('Control+G');
    await this.input(`:${line}:${column}`);
    await this.page.keyboard.press('Enter');
    await this.page.locator('.quick-input-widget').waitFor({ state: 'hidden' });
  }

  /** Runs a command by its title. */
  async command(title) {
    await this.page.keyboard.press('F1');
    await this.input(`>${title}`);
    await this.page.locator('.quick-input-list .monaco-list-row').filter({ hasText: title }).first().click();
  }

  async input(text) {
    const box = this.page.locator('.quick-input-widget input').first();
    await box.waitFor();
    await box.fill(text);
  }

  type(text) {
    return this.page.keyboard.insertText(text);
  }

  press(...keys) {
    return keys.reduce((before, key) => before.then(() => this.page.keyboard.press(key)), Promise.resolve());
  }

  /** Waits for a message with this text, and gives it. */
  async message(text) {
    const toast = this.page.locator('.notifications-toasts .notification-list-item').filter({ hasText: text }).first();
    await toast.waitFor({ timeout: PATIENCE });
    return toast;
  }

  async dismissMessages() {
    await this.command('Notifications: Clear All Notifications');
    await until('no message is left', async () => (await this.page.locator('.notifications-toasts .notification-list-item').count()) === 0);
  }
}

/** Asks again and again until the answer is something, and gives it. */
export async function until(what, ask, patience = PATIENCE) {
  const end = Date.now() + patience;
  let last;
  for (;;) {
    try {
      const answer = await ask();
      if (answer) {
        return answer;
      }
      last = undefined;
    } catch (error) {
      last = error;
    }
    if (Date.now() > end) {
      throw new Error(`waited in vain until ${what}${last === undefined ? '' : `: ${last.message}`}`);
    }
    await new Promise((go) => setTimeout(go, 50));
  }
}

function freePort() {
  return new Promise((give, fail) => {
    const server = net.createServer().once('error', fail).listen(0, '127.0.0.1', () => {
      const { port } = server.address();
      server.close(() => give(port));
    });
  });
}
