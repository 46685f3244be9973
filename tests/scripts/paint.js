// Paint texts with the libraries that editors use: node paint.js MODULES GRAMMAR < texts as JSON > tokens as JSON
const fs = require("fs"), path = require("path");
const [modules, grammar] = process.argv.slice(2);
const textmate = require(path.join(modules, "vscode-textmate"));
const oniguruma = require(path.join(modules, "vscode-oniguruma"));

async function main() {
  const wasm = fs.readFileSync(path.join(modules, "vscode-oniguruma", "release", "onig.wasm"));
  await oniguruma.loadWASM(wasm.buffer.slice(wasm.byteOffset, wasm.byteOffset + wasm.byteLength));
  const onigLib = Promise.resolve({
    createOnigScanner: (patterns) => new oniguruma.OnigScanner(patterns),
    createOnigString: (text) => new oniguruma.OnigString(text),
  });
  const load = async () => textmate.parseRawGrammar(fs.readFileSync(grammar, "utf8"), "grammar.json");
  const ours = await new textmate.Registry({ onigLib, loadGrammar: load }).loadGrammar("source.dseq");
  const painted = JSON.parse(fs.readFileSync(0, "utf8")).map((text) => {
    let stack = textmate.INITIAL;
    return text.split("\n").map((line) => {
      const { tokens, ruleStack } = ours.tokenizeLine(line, stack);
      stack = ruleStack;
      return tokens.map((one) => [line.slice(one.startIndex, one.endIndex), one.scopes.slice(1)]);
    });
  });
  process.stdout.write(JSON.stringify(painted));
}

main();
