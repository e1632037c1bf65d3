// The sheet of a model beside it: a document that cannot be edited and follows the model.

import * as vscode from 'vscode';
import type { Server } from './server';

export const SCHEME = 'leastwise-sheet';

/** The sheet follows this long after the last key. */
const PAUSE = 300;

/** Gives the sheets' texts. */
export class Sheets implements vscode.TextDocumentContentProvider, vscode.Disposable {
  readonly onDidChange: vscode.Event<vscode.Uri>;

  private readonly changed = new vscode.EventEmitter<vscode.Uri>();
  private readonly pending = new Map<string, NodeJS.Timeout>();
  private readonly subscriptions: vscode.Disposable[];

  constructor(private readonly server: Server) {
    this.onDidChange = this.changed.event;
    this.subscriptions = [
      this.changed,
      vscode.workspace.registerTextDocumentContentProvider(SCHEME, this),
      vscode.workspace.onDidChangeTextDocument((event) => this.refresh(event.document.uri, PAUSE)),
      vscode.workspace.onDidSaveTextDocument((document) => this.refreshAll(document)),
      server.onDidChange(() => this.refreshAll()),
    ];
  }

  /** Shows the sheet of the document in the editor, beside it. */
  async show(): Promise<void> {
    const document = vscode.window.activeTextEditor?.document;
    if (document === undefined || document.languageId !== 'leastwise') {
      void vscode.window.showInformationMessage('Leastwise: open a model to see its sheet.');
      return;
    }
    const opened = await vscode.workspace.openTextDocument(sheetOf(document.uri));
    const sheet = await vscode.languages.setTextDocumentLanguage(opened, 'leastwise-sheet');
    // It may have been open before, from another day.
    this.refresh(document.uri, 0);
    await vscode.window.showTextDocument(sheet, { viewColumn: vscode.ViewColumn.Beside, preserveFocus: true, preview: false });
  }

  async provideTextDocumentContent(uri: vscode.Uri): Promise<string> {
    try {
      const text = await this.server.execute('leastwise.sheet', uri.query);
      return typeof text === 'string' ? text : 'There is no sheet of this document.\n';
    } catch (error) {
      return `There is no sheet now: ${error instanceof Error ? error.message : String(error)}\n`;
    }
  }

  dispose(): void {
    for (const timer of this.pending.values()) {
      clearTimeout(timer);
    }
    vscode.Disposable.from(...this.subscriptions).dispose();
  }

  /** Asks for the sheet again, if it is open. */
  private refresh(model: vscode.Uri, pause: number): void {
    const sheet = sheetOf(model);
    const key = sheet.toString();
    if (!vscode.workspace.textDocuments.some((open) => open.uri.toString() === key)) {
      return;
    }
    clearTimeout(this.pending.get(key));
    this.pending.set(
      key,
      setTimeout(() => {
        this.pending.delete(key);
        this.changed.fire(sheet);
      }, pause),
    );
  }

  /** A saved file may be included by others, so all open sheets follow it. */
  private refreshAll(saved?: vscode.TextDocument): void {
    if (saved !== undefined && saved.languageId !== 'leastwise') {
      return;
    }
    for (const open of vscode.workspace.textDocuments) {
      if (open.uri.scheme === SCHEME) {
        this.refresh(vscode.Uri.parse(open.uri.query), 0);
      }
    }
  }
}

/** The sheet's address: the model's name to be read, the model's own address to be asked with. */
function sheetOf(model: vscode.Uri): vscode.Uri {
  const name = model.path.split('/').pop()?.replace(/\.least$/, '') ?? 'model';
  return vscode.Uri.from({ scheme: SCHEME, path: `/${name} (sheet)`, query: model.toString() });
}
