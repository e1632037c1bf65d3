// The server's life: started, watched, started again after a crash, and never silently dead.

import { type ChildProcess, spawn } from 'node:child_process';
import { once } from 'node:events';
import * as fs from 'node:fs';
import * as os from 'node:os';
import * as path from 'node:path';
import * as vscode from 'vscode';
import { CloseAction, ErrorAction, LanguageClient, RevealOutputChannelOn, type LanguageClientOptions, type ServerOptions } from 'vscode-languageclient/node';
import { findProgram } from './program';

/** More crashes than this in so many minutes, and the server is left alone until asked for. */
const CRASHES = 5;
const MINUTES = 3;

/** A server that has not answered its first request by then, in milliseconds, is ended. */
const PATIENCE = 30_000;

/** A server that has been asked to end may take so long. */
const FAREWELL = 2_000;

/** The documents that the server is told of. Old versions in a comparison are not among them. */
export const DOCUMENTS = [
  { language: 'leastwise', scheme: 'file' },
  { language: 'leastwise', scheme: 'untitled' },
];

/** A client that writes to the log and leaves it to `Server` to tell people. */
class QuietClient extends LanguageClient {
  override error(message: string, data?: unknown): void {
    super.error(message, data, false);
  }
}

/** The one server of this window. */
export class Server implements vscode.Disposable {
  /** The server runs now, or has ended. */
  readonly onDidChange: vscode.Event<void>;

  private readonly changed = new vscode.EventEmitter<void>();
  private readonly log = vscode.window.createOutputChannel('Leastwise', { log: true });
  private readonly status = vscode.languages.createLanguageStatusItem('leastwise.server', DOCUMENTS);
  private client: QuietClient | undefined;
  private process: ChildProcess | undefined;
  private crashes: number[] = [];
  private waiting: NodeJS.Timeout | undefined;
  // Starts and stops come one after the other.
  private last: Promise<void> = Promise.resolve();

  constructor(private readonly extension: vscode.Uri) {
    this.onDidChange = this.changed.event;
    this.status.name = 'Leastwise';
    this.status.command = { command: 'leastwise.showLog', title: 'Log' };
  }

  /** Starts the server, or says why that cannot be. */
  start(): Promise<void> {
    return this.next(() => this.begin());
  }

  /** Ends the server, if it runs, and starts it; earlier crashes are forgotten. */
  restart(): Promise<void> {
    this.crashes = [];
    return this.next(async () => {
      await this.end();
      await this.begin();
    });
  }

  /** Ends the server. */
  stop(): Promise<void> {
    return this.next(() => this.end());
  }

  /** What the command of the server answers. */
  async execute(command: string, ...parameters: unknown[]): Promise<unknown> {
    const client = this.client;
    if (client === undefined || !client.isRunning()) {
      throw new Error('The server does not run.');
    }
    return client.sendRequest('workspace/executeCommand', { command, arguments: parameters });
  }

  /** Shows what the server and its client have written. */
  showLog(): void {
    this.log.show(true);
  }

  dispose(): void {
    clearTimeout(this.waiting);
    this.status.dispose();
    this.changed.dispose();
    this.log.dispose();
  }

  private next(step: () => Promise<void>): Promise<void> {
    this.last = this.last.then(step).catch((error: unknown) => this.log.error(String(error)));
    return this.last;
  }

  private async begin(): Promise<void> {
    clearTimeout(this.waiting);
    if (this.client !== undefined) {
      return;
    }
    const found = findProgram({
      setting: vscode.workspace.getConfiguration('leastwise').get<string>('server.path', ''),
      folders: (vscode.workspace.workspaceFolders ?? []).map((folder) => folder.uri.fsPath),
      extension: this.extension.fsPath,
    });
    if (found.path === undefined) {
      this.log.error(found.why);
      this.show('no server', vscode.LanguageStatusSeverity.Error, found.why);
      void this.tellMissing(found.why);
      return;
    }
    this.log.info(`starting ${found.path} (from the ${found.from})`);
    this.show('starting', vscode.LanguageStatusSeverity.Information, found.path, true);
    const client = this.newClient(found.path);
    this.client = client;
    const late = setTimeout(() => this.process?.kill('SIGKILL'), PATIENCE);
    try {
      await client.start();
      const version = client.initializeResult?.serverInfo?.version;
      this.show('running', vscode.LanguageStatusSeverity.Information, version === undefined ? found.path : `${found.path}, ${version}`);
      this.changed.fire();
    } catch (error) {
      this.log.error(`${found.path} did not start: ${String(error)}`);
      this.ended(client);
    } finally {
      clearTimeout(late);
    }
  }

  private newClient(program: string): QuietClient {
    const run: ServerOptions = async () => {
      const cwd = vscode.workspace.workspaceFolders?.find((folder) => folder.uri.scheme === 'file')?.uri.fsPath ?? os.homedir();
      const child = spawn(program, ['lsp'], { cwd, stdio: 'pipe' });
      this.process = child;
      child.on('exit', (code, signal) => this.log.info(`the server's process has ended: ${signal ?? `exit status ${code}`}`));
      await once(child, 'spawn');
      return child;
    };
    const options: LanguageClientOptions = {
      documentSelector: DOCUMENTS,
      diagnosticCollectionName: 'leastwise',
      outputChannel: this.log,
      revealOutputChannelOn: RevealOutputChannelOn.Never,
      initializationOptions: () => settings(),
      synchronize: { configurationSection: 'leastwise' },
      initializationFailedHandler: () => false,
      errorHandler: {
        error: () => ({ action: ErrorAction.Continue, handled: true }),
        closed: () => {
          this.ended(client);
          return { action: CloseAction.DoNotRestart, message: 'the connection to the server is closed', handled: true };
        },
      },
    };
    const client: QuietClient = new QuietClient('leastwise', 'Leastwise', run, options);
    return client;
  }

  /** A client has lost its server without being asked to. */
  private ended(client: QuietClient): void {
    if (client !== this.client) {
      return;
    }
    this.client = undefined;
    this.changed.fire();
    this.process?.kill();
    const now = Date.now();
    this.crashes = [...this.crashes.filter((time) => now - time < MINUTES * 60_000), now];
    const count = this.crashes.length;
    if (count >= CRASHES) {
      const why = `The server has ended unexpectedly ${count} times within ${MINUTES} minutes.`;
      this.log.error(why);
      this.show('stopped', vscode.LanguageStatusSeverity.Error, why);
      void this.tellStopped(why);
      return;
    }
    this.log.warn('the server has ended unexpectedly and is started again');
    this.show('starting again', vscode.LanguageStatusSeverity.Warning, 'It had ended unexpectedly.', true);
    // At once the first time, then after 1, 2, 4 seconds.
    this.waiting = setTimeout(() => void this.start(), count === 1 ? 0 : 500 * 2 ** (count - 1));
  }

  private async end(): Promise<void> {
    clearTimeout(this.waiting);
    const { client, process } = this;
    this.client = undefined;
    this.process = undefined;
    if (client !== undefined) {
      await client.dispose(FAREWELL).catch((error: unknown) => this.log.warn(`while the server was ended: ${String(error)}`));
      this.changed.fire();
    }
    if (process !== undefined && process.exitCode === null) {
      setTimeout(() => process.kill('SIGKILL'), FAREWELL).unref();
    }
    this.show('stopped', vscode.LanguageStatusSeverity.Warning);
  }

  private show(text: string, severity: vscode.LanguageStatusSeverity, detail = '', busy = false): void {
    this.status.text = `Leastwise: ${text}`;
    this.status.detail = detail;
    this.status.severity = severity;
    this.status.busy = busy;
  }

  private async tellMissing(why: string): Promise<void> {
    const setting = 'Open the Setting';
    const how = 'How to Install';
    const chosen = await vscode.window.showErrorMessage(`Leastwise: ${why}`, setting, how);
    if (chosen === setting) {
      await vscode.commands.executeCommand('workbench.action.openSettings', 'leastwise.server.path');
    } else if (chosen === how) {
      await vscode.commands.executeCommand('markdown.showPreview', vscode.Uri.joinPath(this.extension, readme(this.extension.fsPath)));
    }
  }

  private async tellStopped(why: string): Promise<void> {
    const restart = 'Restart';
    const log = 'Show the Log';
    const chosen = await vscode.window.showErrorMessage(`Leastwise: ${why}`, restart, log);
    if (chosen === restart) {
      await this.restart();
    } else if (chosen === log) {
      this.showLog();
    }
  }
}

/** Packaging writes the name in small letters. */
function readme(folder: string): string {
  return fs.existsSync(path.join(folder, 'readme.md')) ? 'readme.md' : 'README.md';
}

/** What the server is told when it starts; later it asks. Where the program lies is none of its business. */
function settings(): unknown {
  const { server: _, ...rest } = JSON.parse(JSON.stringify(vscode.workspace.getConfiguration('leastwise'))) as Record<string, unknown>;
  return rest;
}
