// Bundles the page's scripts and style, packs the large ones (gzip, then base64) and collects the notices of what is inside.
//   node bundle.mjs SOURCES BUILD      BUILD/node_modules holds the packages; the assets go to BUILD/out
import {createRequire} from "node:module";
import {existsSync, mkdirSync, readFileSync, readdirSync, writeFileSync} from "node:fs";
import {gzipSync} from "node:zlib";
import {join} from "node:path";

const [sources, build] = process.argv.slice(2);
const {buildSync, version} = createRequire(join(build, "package.json"))("esbuild");
const modules = join(build, "node_modules");
const out = join(build, "out");
mkdirSync(out, {recursive: true});

function bundle(entry, settings = {}) {
  const made = buildSync({
    entryPoints: [join(sources, entry)],
    bundle: true,
    minify: true,
    format: "iife",
    target: "es2020",
    write: false,
    legalComments: "eof",
    logLevel: "warning",
    nodePaths: [modules],
    absWorkingDir: sources,
    ...settings,
  });
  return Buffer.from(made.outputFiles[0].contents);
}

// The operating system stands in a gzip header: set to "unknown", so that equal sources give equal bytes everywhere.
function packed(bytes) {
  const zipped = gzipSync(bytes, {level: 9});
  zipped[9] = 255;
  return zipped.toString("base64");
}

function notices() {
  const parts = [
    ["echarts", ["NOTICE", "LICENSE", "licenses/LICENSE-d3"], "https://github.com/apache/echarts"],
    ["zrender", ["LICENSE"], "https://github.com/ecomfe/zrender"],
    ["tslib", ["LICENSE.txt"], "https://github.com/microsoft/tslib"],
    ["elkjs", ["LICENSE.md"], "https://github.com/kieler/elkjs"],
  ];
  let text = "";
  for (const [name, files, home] of parts) {
    const about = JSON.parse(readFileSync(join(modules, name, "package.json"), "utf8"));
    text += `${name} ${about.version} (${about.license}); its source code: ${home}\n\n`;
    for (const file of files)
      if (existsSync(join(modules, name, file))) text += readFileSync(join(modules, name, file), "utf8").trim() + "\n\n";
  }
  return text;
}

if (!version || !readdirSync(modules).includes("elkjs")) throw new Error("packages are missing");
writeFileSync(join(out, "charts"), packed(bundle("main.js")));
writeFileSync(join(out, "diagram"), packed(bundle("diagram.js")));
writeFileSync(join(out, "loader"), bundle("loader.js"));
writeFileSync(join(out, "style"), bundle("page.css", {format: undefined, target: undefined}));
writeFileSync(join(out, "notices"), notices());
