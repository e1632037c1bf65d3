// What the editor calls: the commands, and the server from the first model to the end.

import * as vscode from 'vscode';
import { Server } from './server';
import { Sheets } from './sheet';

let server: Server | undefined;

export async function activate(context: vscode.ExtensionContext): Promise<void> {
  const running = new Server(context.extensionUri);
  const sheets = new Sheets(running);
  server = running;
  context.subscriptions.push(
    running,
    sheets,
    vscode.commands.registerCommand('leastwise.showSheet', () => sheets.show()),
    vscode.commands.registerCommand('leastwise.restartServer', () => running.restart()),
    vscode.commands.registerCommand('leastwise.showLog', () => running.showLog()),
    vscode.workspace.onDidChangeConfiguration((event) => {
      if (event.affectsConfiguration('leastwise.server.path')) {
        void running.restart();
      }
    }),
    // A folder's own setting of the path counts from now on.
    vscode.workspace.onDidGrantWorkspaceTrust(() => void running.restart()),
  );
  await running.start();
}

export async function deactivate(): Promise<void> {
  await server?.stop();
}
