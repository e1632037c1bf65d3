-- Starts the server for models, says once where there is none, and starts it anew after a crash.

if vim.g.loaded_leastwise or vim.fn.has("nvim-0.11") == 0 then
  return
end
vim.g.loaded_leastwise = true

local CRASHES = 3 -- within
local MINUTES = 3

local group = vim.api.nvim_create_augroup("leastwise", { clear = true })
local crashes = {}
local told = false

local function say(text, level)
  vim.schedule(function()
    vim.notify("leastwise: " .. text, level or vim.log.levels.WARN)
  end)
end

local function program()
  local set = vim.g.leastwise_server
  return set ~= nil and set ~= "" and vim.fn.expand(set) or "leastwise"
end

-- A crash is an end that nobody asked for: neither Neovim's own, nor one by a polite signal.
local function ended(code, signal)
  if (code == 0 and signal == 0) or signal == 15 or vim.v.exiting ~= vim.NIL then
    return
  end
  local now = vim.uv.now()
  crashes = vim.tbl_filter(function(at)
    return now - at < MINUTES * 60 * 1000
  end, crashes)
  table.insert(crashes, now)
  if #crashes > CRASHES then
    say(
      ("the server ended %d times in %d minutes (status %d, signal %d); :LeastwiseRestart tries again"):format(
        #crashes, MINUTES, code, signal
      ),
      vim.log.levels.ERROR
    )
    return
  end
  vim.schedule(function()
    vim.cmd("LeastwiseRestart")
  end)
end

vim.lsp.config("leastwise", { on_exit = ended })

vim.api.nvim_create_user_command("LeastwiseRestart", function()
  vim.lsp.enable("leastwise", false)
  for _, client in ipairs(vim.lsp.get_clients({ name = "leastwise" })) do
    client:stop(true)
  end
  vim.defer_fn(function()
    vim.lsp.enable("leastwise")
  end, 100)
end, { desc = "Start the language server for models anew" })

-- The sheet is text of its own, beside the model, renewed each time it is asked for.
vim.api.nvim_create_user_command("LeastwiseSheet", function()
  local source = vim.api.nvim_get_current_buf()
  local client = vim.lsp.get_clients({ bufnr = source, name = "leastwise" })[1]
  if not client then
    say("no server is at work on this buffer")
    return
  end
  client:request("workspace/executeCommand", {
    command = "leastwise.sheet",
    arguments = { vim.uri_from_bufnr(source) },
  }, function(failure, sheet)
    if failure or type(sheet) ~= "string" then
      say("there is no sheet: " .. (failure and failure.message or "no answer"))
      return
    end
    local name = "leastwise-sheet://" .. vim.fn.fnamemodify(vim.api.nvim_buf_get_name(source), ":t")
    local buffer = vim.fn.bufnr(name)
    if buffer == -1 then
      buffer = vim.api.nvim_create_buf(false, true)
      vim.api.nvim_buf_set_name(buffer, name)
    end
    vim.bo[buffer].modifiable = true
    vim.api.nvim_buf_set_lines(buffer, 0, -1, false, vim.split(sheet, "\n"))
    vim.bo[buffer].modifiable = false
    if vim.fn.bufwinid(buffer) == -1 then
      vim.api.nvim_open_win(buffer, false, { split = "right" })
    end
  end, source)
end, { desc = "Show all that is derived of this model" })

vim.api.nvim_create_autocmd("FileType", {
  group = group,
  pattern = "leastwise",
  callback = function()
    if vim.fn.executable(program()) == 1 or told then
      return
    end
    told = true
    say(("no program `%s`; install leastwise, or say where it is: vim.g.leastwise_server = \"/path/to/leastwise\""):format(program()))
  end,
})

-- A server that is not there would be complained about for each file.
if vim.fn.executable(program()) == 1 then
  vim.lsp.enable("leastwise")
end
