// The TextMate grammar, read by the editor's own reader: what colour the words of a model get before the server speaks.
//
//   node grammar.mjs FOLDER        the folder that install.sh has filled

import fs from 'node:fs';
import { createRequire } from 'node:module';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const here = path.dirname(fileURLToPath(import.meta.url));
const root = path.resolve(here, '../../..');

/** Runs all checks; `report(name, wrong)` gets a text where something is wrong. */
export async function checkGrammar(folder, report) {
  const tokenize = await reader(folder);

  /** `expected` names pieces of the text in their order, each with the scope it must have. */
  const check = (text, ...expected) => {
    const tokens = tokenize(text);
    let at = 0;
    for (const [piece, scope] of expected) {
      const found = tokens.findIndex((token, index) => index >= at && token.text.trim() === piece);
      if (found < 0) {
        return report(text, `no piece \`${piece}\` in ${show(tokens)}`);
      }
      const { scopes } = tokens[found];
      const innermost = scopes[scopes.length - 1];
      if (scope === '' ? scopes.length !== 1 : innermost !== `${scope}.leastwise`) {
        return report(text, `\`${piece}\` is ${scopes.join(' ')}, not ${scope}`);
      }
      at = found + 1;
    }
    return report(text);
  };

  const keyword = 'keyword.control', clause = 'keyword.other', modifier = 'storage.modifier';
  const name = 'variable.other', number = 'constant.numeric', power = 'constant.numeric.power', unit = 'keyword.other.unit';
  const prime = 'keyword.operator.derivative', arithmetic = 'keyword.operator.arithmetic', known = 'support.function';
  const constant = 'constant.language', type = 'support.type.quantity', term = 'entity.name.type.term';
  const claim = 'entity.name.function.claim', called = 'entity.name.function', comment = 'comment.line.number-sign';

  // Letters, marks, primes.
  check("kinetic bob = 1/2 m φ'^2", ['kinetic', keyword], ['bob', term], ['1', number], ['/', arithmetic], ['m', name], ['φ', name], ["'", prime], ['^', arithmetic], ['2', number]);
  check('kinetic a = θ̇₁² 𝑥̈', ['θ̇₁', name], ['²', power], ['𝑥̈', name]);
  check('kinetic a = ẋ_cart länge m₁₂ U′(r)', ['ẋ_cart', name], ['länge', name], ['m₁₂', name], ['U', called], ['′', prime], ['r', name]);
  check("potential a = sin² θ φ' + √(x) − 2e3", ['sin', known], ['²', power], ['θ', name], ["'", prime], ['√', arithmetic], ['−', arithmetic], ['2e3', number]);
  // Words only where they can stand.
  check('coordinate mass, t: length # a', ['coordinate', keyword], ['mass', name], ['length', type], ['# a', comment]);
  check('parameter m: mass = 42 kg', ['m', 'variable.other.constant'], ['mass', type], ['42', number], ['kg', unit]);
  check('parameter K: V s/m = 28.8 V s/m, m₁ = (1, 2) kg, k', ['K', 'variable.other.constant'], ['V', type], ['28.8', number], ['m', unit], ['m₁', 'variable.other.constant'], ['kg', unit], ['k', 'variable.other.constant']);
  check('parameter m = (1/(2), 3) kg, a', ['3', number], ['kg', unit], ['a', 'variable.other.constant']);
  check('parameter F: force = 3·10^-3 N # "x" = 3', ['force', type], ['N', unit], ['# "x" = 3', comment]);
  check(' kinetic x = 1', ['kinetic', name]);
  check('kinetics = 1', ['kinetics', name]);
  check('kinetic force = index on', ['force', term], ['index', name], ['on', name]);
  check('cyclic coordinate φ: angle', ['cyclic', modifier], ['coordinate', keyword], ['φ', name], ['angle', type]);
  check('broken symmetry drop: r -> r + ε', ['broken', modifier], ['symmetry', keyword], ['drop', claim], ['->', 'keyword.operator.arrow'], ['ε', constant]);
  check('symmetry turn: (x, y) → (x cos eps, y)', ['turn', claim], ['→', 'keyword.operator.arrow'], ['cos', known], ['eps', constant]);
  check('kinetic a = ε π t ex', ['ε', name], ['π', constant], ['t', constant], ['ex', constant]);
  check('conserved spin = momentum(φ) + energy', ['spin', claim], ['momentum', known], ['energy', constant]);
  check('function U(s): energy', ['U', called], ['s', name], ['energy', type]);
  check('force brake on r = -F0 tanh(r)', ['force', keyword], ['brake', term], ['on', clause], ['r', name], ['tanh', known]);
  check('force on on x = F', ['on', term], ['on', clause], ['x', name]);
  check('force on on = F', ['on', clause], ['on', name]);
  check('force on x = F', ['on', clause], ['x', name]);
  check('constraint rod[i]: |X| = l', ['rod', term], ['i', name], ['X', name]);
  check('let f(x) = sum(i in 1..N: x[i])', ['f', called], ['sum', known], ['i', 'variable.other.enummember'], ['in', clause], ['1', number], ['..', 'keyword.operator.range'], ['N', name]);
  check('let P = (r sin θ, 0)', ['P', 'variable.other.property'], ['sin', known]);
  check('index i: 1..8', ['i', 'variable.other.enummember'], ['1', number], ['..', 'keyword.operator.range']);
  check('system top, with c = 1', ['top', 'entity.name.namespace'], ['with', clause], ['c', name]);
  check('system top, dimensionless', ['dimensionless', clause]);
  check('include "a #b.least" # c "d"', ['include', keyword], ['"a #b.least"', 'string.quoted.double'], ['# c "d"', comment]);
  check("run sway: from r = 30 m, θ = 4° 30′, over 60 s, with u = 2 m, until r < m", ['sway', 'entity.name.function.run'], ['from', clause], ['r', name], ['30', number], ['m', unit], ['°', unit], ['′', unit], ['over', clause], ['s', unit], ['with', clause], ['u', name], ['2', number], ['m', name], ['until', clause], ['<', 'keyword.operator.comparison'], ['m', name]);
  check('run from from = 1 m, over 2 s', ['from', clause], ['from', name], ['m', unit], ['over', clause]);
  // Items over several lines, and their end.
  check('kinetic a = 1\n# c\n    + kinetic\nkinetic b = 2', ['a', term], ['# c', comment], ['+', arithmetic], ['kinetic', name], ['kinetic', keyword], ['b', term]);
  check('run a: from x = 1 m,\n    over 2 s,\n    with u = 2 s', ['m', unit], ['over', clause], ['s', unit], ['with', clause], ['s', name]);
  check('parameter a =\n  2 kg\nlet b = kg', ['kg', unit], ['let', keyword], ['kg', name]);
  // Formulas alone, as in hovers.
  check("p_φ = m r² sin² θ φ̇", ['p_φ', name], ['=', 'keyword.operator.assignment'], ['m', name], ['²', power], ['sin', known], ['φ̇', name]);
  check('dh/dt = -c ż² - m a ż', ['dh', name], ['ż', name]);

  // No piece of the example models goes without a colour, and no colour of one item runs into the next.
  for (const file of fs.readdirSync(path.join(root, 'grammar/examples')).filter((each) => each.endsWith('.least'))) {
    const lines = fs.readFileSync(path.join(root, 'grammar/examples', file), 'utf8').split('\n');
    const bare = [];
    tokenize(lines.join('\n')).forEach((token) => {
      const begins = token.start === 0 && /^\p{L}/u.test(token.text);
      if (token.text.trim() !== '' && token.scopes.length === 1) {
        bare.push(`${token.line + 1}: \`${token.text}\``);
      } else if (begins && !/^(keyword\.control|storage\.modifier)\./.test(token.scopes.at(-1))) {
        bare.push(`${token.line + 1}: \`${token.text}\` is ${token.scopes.at(-1)}`);
      }
    });
    report(`${file} is coloured`, bare.length > 0 ? bare.join('; ') : undefined);
  }
}

const show = (tokens) => tokens.map((token) => `${token.text}|${token.scopes.at(-1)}`).join(' ');

/** A function from a text to its pieces with their scopes. */
async function reader(folder) {
  const require = createRequire(pathToFileURL(path.join(folder, 'package.json')));
  const { Registry, INITIAL, parseRawGrammar } = require('vscode-textmate');
  const { loadWASM, OnigScanner, OnigString } = require('vscode-oniguruma');
  await loadWASM(fs.readFileSync(require.resolve('vscode-oniguruma/release/onig.wasm')));
  const file = path.join(root, 'editors/vscode/syntaxes/leastwise.tmLanguage.json');
  const registry = new Registry({
    onigLib: Promise.resolve({
      createOnigScanner: (patterns) => new OnigScanner(patterns),
      createOnigString: (text) => new OnigString(text),
    }),
    loadGrammar: () => Promise.resolve(parseRawGrammar(fs.readFileSync(file, 'utf8'), file)),
  });
  const grammar = await registry.loadGrammar('source.leastwise');
  return (text) => {
    let stack = INITIAL;
    return text.split('\n').flatMap((line, number) => {
      const { tokens, ruleStack } = grammar.tokenizeLine(line, stack);
      stack = ruleStack;
      return tokens.map(({ startIndex, endIndex, scopes }) => ({
        text: line.slice(startIndex, endIndex), start: startIndex, line: number, scopes,
      }));
    });
  };
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  let passed = 0, failed = 0;
  await checkGrammar(process.argv[2] ?? path.join(root, 'target/editors/vscode'), (name, wrong) => {
    wrong === undefined ? passed++ : failed++;
    if (wrong !== undefined) {
      console.log(`FAIL colours: ${name}: ${wrong}`);
    }
  });
  console.log(`${passed} passed, ${failed} failed`);
  process.exitCode = failed > 0 ? 1 : 0;
}
