-- Opens a text calculation sheet as a person would, with the configuration beside
-- this file, and checks what the editor then shows and does:
--
--     nvim --headless --clean -u halfwidth.lua -c 'luafile check.lua' -c 'cquit 1'
--
-- halfwidth-server must be on the path. The exit status is 1 where a check fails.
local folder = vim.fn.tempname()

local function fail(text)
  io.stderr:write("check.lua: " .. text .. "\n")
  vim.fn.delete(folder, "rf")
  vim.cmd("cquit 1")
end

local function wait(what, condition)
  if not vim.wait(10000, condition, 20) then
    fail(what .. " did not come; diagnostics: " .. vim.inspect(vim.diagnostic.get(0)))
  end
end

-- found gives the first diagnostic with a code, or nil.
local function found(code)
  for _, d in ipairs(vim.diagnostic.get(0)) do
    if (d.code or d.user_data.lsp.code) == code then
      return d
    end
  end
end

local function lines()
  return vim.api.nvim_buf_get_lines(0, 0, -1, false)
end

local function ask(method, line, column, more)
  vim.api.nvim_win_set_cursor(0, { line, column })
  local params = vim.tbl_extend("force", vim.lsp.util.make_position_params(), more or {})
  local replies = vim.lsp.buf_request_sync(0, method, params, 10000)
  local _, reply = next(replies or {})
  if not reply or not reply.result then
    fail(method .. " gave " .. vim.inspect(replies))
  end
  return reply.result
end

-- choose runs the code action with a title, as a person who picks it in the list.
local function choose(title, line)
  vim.api.nvim_win_set_cursor(0, { line, 0 })
  local offered
  vim.ui.select = function(items, options, on_choice)
    offered = vim.tbl_map(options.format_item, items)
    for i, item in ipairs(items) do
      if offered[i] == title then
        on_choice(item, i)
      end
    end
  end
  vim.lsp.buf.code_action()
  wait("the code actions", function() return offered ~= nil end)
  if not vim.tbl_contains(offered, title) then
    fail("no action " .. title .. " among " .. vim.inspect(offered))
  end
end

vim.fn.mkdir(folder)
vim.fn.writefile({ "depot,minutes", "North,12", "North,14", "Quay,20", "North,16", "North,11", "North,17" }, folder .. "/trips.csv")
vim.fn.writefile({
  "work out,label,sample,confidence,> mean,> status",
  "mean-interval,größer 😀,minutes in trips.csv where depot = North,95,,",
  "mean-intervall,b,1; 2; 3; 4; 5,,9,",
}, folder .. "/a.calculations.csv")
vim.cmd("edit " .. vim.fn.fnameescape(folder .. "/a.calculations.csv"))

-- Diagnostics, and where they stand. Columns of diagnostics are in bytes here.
wait("the diagnostics", function() return found("bad-value") and found("unknown-name") end)
local bare = found("bad-value")
local cell = lines()[bare.lnum + 1]:sub(bare.col + 1, bare.end_col)
if cell ~= "95" or bare.severity ~= vim.diagnostic.severity.ERROR or bare.source ~= "halfwidth" then
  fail("95 is shown as " .. vim.inspect(bare))
end

-- Quick fixes; the text reaches the server as incremental edits.
choose("Write 95% for 95", 2)
wait("95%", function() return lines()[2]:find(",95%%,") and not found("bad-value") end)
choose('Use "mean-interval"', 3)
wait("mean-interval", function() return lines()[3]:find("^mean%-interval,") and not found("unknown-name") end)

-- The stale 9 of the second row is told; the results are shown as hints.
wait("results out of date", function() return found("results-out-of-date") and found("results") end)
if found("results").message ~= "mean 14" then -- (12 + 14 + 16 + 11 + 17) / 5
  fail("the hint of the first row is " .. vim.inspect(found("results")))
end

-- Hover, completion and signature help.
local hover = ask("textDocument/hover", 2, 3)
if not hover.contents.value:find("## mean%-interval") then
  fail("hover gave " .. vim.inspect(hover))
end
vim.api.nvim_buf_set_lines(0, 3, 3, false, { "mean-interval,c,minutes in t,,," })
wait("the new row", function() return found("unknown-name") end)
local labels = vim.tbl_map(function(item) return item.label end, ask("textDocument/completion", 4, #"mean-interval,c,minutes in t").items)
if not vim.tbl_contains(labels, "trips.csv") then
  fail("completion offered " .. vim.inspect(labels))
end
local help = ask("textDocument/signatureHelp", 4, #"mean-interval,c,minutes in t,")
if help.signatures[1].parameters[help.activeParameter + 1].documentation:find("the confidence of the interval") == nil then
  fail("signature help gave " .. vim.inspect(help))
end
vim.api.nvim_buf_set_text(0, 3, #"mean-interval,c,minutes in t", 3, #"mean-interval,c,minutes in t", { "rips.csv" })
wait("the row to be right", function() return not found("unknown-name") end)

-- Fill the results, as an edit of the buffer that can be undone.
choose("Fill all results", 1)
local want = {
  "work out,label,sample,confidence,> mean,> status",
  "mean-interval,größer 😀,minutes in trips.csv where depot = North,95%,14,ok",
  "mean-interval,b,1; 2; 3; 4; 5,,3,ok",
  "mean-interval,c,minutes in trips.csv,,15,ok",
}
wait("the results", function() return vim.deep_equal(lines(), want) end)
wait("up to date", function() return not found("results-out-of-date") and not found("results-not-filled") end)

-- A data file changes on disk; saving the sheet has it read again.
vim.fn.writefile({ "depot,minutes", "North,13", "North,14", "Quay,20", "North,16", "North,11", "North,17", "North,19" }, folder .. "/trips.csv")
vim.cmd("silent write")
wait("the changed file", function() return found("results-out-of-date") end)

vim.cmd("bdelete!")
vim.fn.delete(folder, "rf")
print("check.lua: diagnostics, fixes, hover, completion, signature help and filled results are right\n")
vim.cmd("qall!")
