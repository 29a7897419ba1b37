// A live sheet session: two sheets are handed over, a cell changes, and the
// server tells which results that altered.
//
//     node client.js [path of halfwidth-server]
const { spawn } = require("node:child_process");
const assert = require("node:assert/strict");
const rpc = require("vscode-jsonrpc/node");

const server = spawn(process.argv[2] || "halfwidth-server", [], { stdio: ["pipe", "pipe", "inherit"] });
const connection = rpc.createMessageConnection(
  new rpc.StreamMessageReader(server.stdout),
  new rpc.StreamMessageWriter(server.stdin),
);

// Publications arrive in order; next() waits for the one of a version.
const published = [];
let waiting = () => {};
connection.onNotification("sheets/publishResults", (params) => {
  published.push(params);
  waiting();
});
connection.onNotification("sheets/refused", (params) => {
  throw new Error(params.error.message);
});
async function next(sheet, version) {
  for (;;) {
    const at = published.findIndex((p) => p.versions[sheet] === version);
    if (at >= 0) return published.splice(0, at + 1)[at];
    await new Promise((resolve) => (waiting = resolve));
  }
}
const cell = (publication, address) => publication.cells.find((c) => c.cell === address)?.value;

async function main() {
  connection.listen();
  const { serverInfo, capabilities } = await connection.sendRequest("initialize", {
    processId: process.pid,
    capabilities: {},
  });
  assert(capabilities.experimental.halfwidth.methods.includes("sheets/didOpen"));
  await connection.sendNotification("initialized", {});

  await connection.sendNotification("sheets/didOpen", {
    book: "larkmoor", sheet: "Trips", version: 1,
    cells: [{ at: "A1", rows: [["depot", "minutes"], ["North", 12], ["Quay", 20], ["North", 14]] }],
  });
  await connection.sendNotification("sheets/didOpen", {
    book: "larkmoor", sheet: "Calculations", version: 1,
    cells: [{ at: "A1", rows: [
      ["work out", "sample", "> mean", "> status"],
      ["mean-interval", "minutes in Trips where depot = North"],
    ] }],
  });
  const first = await next("Calculations", 1);
  assert.equal(cell(first, "C2"), 13); // (12 + 14) / 2
  console.log(`North: ${cell(first, "C2")} minutes (${cell(first, "D2")})`);

  await connection.sendNotification("sheets/didChange", {
    book: "larkmoor", sheet: "Trips", baseVersion: 1, version: 2,
    cells: [{ at: "B4", rows: [[16]] }],
  });
  const second = await next("Trips", 2);
  assert.equal(cell(second, "C2"), 14); // (12 + 16) / 2
  console.log(`North, one trip corrected: ${cell(second, "C2")} minutes`);

  // Expressions may name the open sheets; the numbers are those of the sheet.
  const outcome = await connection.sendRequest("functions/answer", {
    name: "mean-interval", book: "larkmoor",
    arguments: { sample: "minutes in Trips where depot = North" },
  });
  assert.equal(outcome.results.mean, 14);

  await connection.sendNotification("sheets/didClose", { book: "larkmoor" });
  await connection.sendRequest("shutdown");
  await connection.sendNotification("exit");
  const status = await new Promise((resolve) => server.on("close", resolve));
  assert.equal(status, 0);
  console.log(`${serverInfo.name} ${serverInfo.version} ended with ${status}`);
}

main().catch((error) => {
  console.error(error);
  process.exit(1);
});
