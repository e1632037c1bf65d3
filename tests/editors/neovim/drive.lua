-- Opens a model, types in it, and looks at what Neovim draws.

local function out(text)
  io.stdout:write(text .. "\n")
end

local function check(name, good, what)
  out((good and "PASS " or "FAIL ") .. name .. (good and "" or ": " .. vim.inspect(what):sub(1, 600)))
end

local function wait(ready)
  return vim.wait(15000, ready, 20)
end

local function drive()
  vim.o.lines = 80 -- hints are drawn for what is visible
  vim.opt.runtimepath:append(vim.env.LEASTWISE_RUNTIME)
  vim.g.leastwise_server = vim.env.LEASTWISE_PROGRAM
  vim.cmd("filetype plugin indent on | syntax on")
  vim.cmd("runtime plugin/leastwise.lua")
  vim.lsp.inlay_hint.enable(true)
  vim.cmd("edit " .. vim.env.LEASTWISE_FOLDER .. "/winch.least")
  check("the file type is known", vim.bo.filetype == "leastwise", vim.bo.filetype)

  local function client()
    return vim.lsp.get_clients({ bufnr = 0, name = "leastwise" })[1]
  end
  check("the server is attached", wait(function() return client() ~= nil and client().initialized end), vim.lsp.get_clients())

  local function line_of(pattern)
    for k, line in ipairs(vim.api.nvim_buf_get_lines(0, 0, -1, false)) do
      local at = line:find(pattern)
      if at then return k, at - 1 end
    end
  end

  -- Hints, as virtual text.
  local function drawn()
    local found = {}
    for name, space in pairs(vim.api.nvim_get_namespaces()) do
      if name:find("inlay") then
        for _, m in ipairs(vim.api.nvim_buf_get_extmarks(0, space, 0, -1, { details = true })) do
          for _, chunk in ipairs(m[4].virt_text or {}) do table.insert(found, chunk[1]) end
        end
      end
    end
    return table.concat(found, "\n")
  end
  -- Hints are drawn with the window.
  wait(function() vim.cmd("redraw!") return drawn():find("cyclic: p = m r² sin² θ φ̇", 1, true) ~= nil end)
  check("a hint stands behind the coordinate", drawn():find("cyclic: p = m r² sin² θ φ̇", 1, true) ~= nil, drawn())
  check("a hint stands behind the claim", drawn():find("exact", 1, true) ~= nil, drawn())
  check("a hint sums up", drawn():find("3 degrees of freedom", 1, true) ~= nil, drawn())

  -- A slip: a finding, a mend.
  local row = line_of("^potential weight")
  vim.api.nvim_buf_set_lines(0, row - 1, row, false, { "potential weight  = mm g P[3]" })
  local function finding(code)
    for _, d in ipairs(vim.diagnostic.get(0)) do
      if d.code == code then return d end
    end
  end
  wait(function() return finding("undeclared-name") ~= nil end)
  local d = finding("undeclared-name")
  check("a slip is found at its place", d ~= nil and d.lnum == row - 1 and d.col == 20, d or vim.diagnostic.get(0))
  local squiggle = false
  for name, space in pairs(vim.api.nvim_get_namespaces()) do
    if name:find("diagnostic") then
      for _, m in ipairs(vim.api.nvim_buf_get_extmarks(0, space, 0, -1, { details = true })) do
        squiggle = squiggle or m[4].hl_group == "DiagnosticUnderlineError"
      end
    end
  end
  check("the slip is underlined", squiggle)
  vim.cmd("redraw!")
  check("the hints stay while the text is broken", drawn():find("cyclic: p", 1, true) ~= nil, drawn())

  vim.api.nvim_win_set_cursor(0, { row, 20 })
  vim.lsp.buf.code_action({ apply = true, filter = function(a) return a.title:find("Declare `parameter mm`", 1, true) ~= nil end })
  wait(function() return line_of("^parameter mm$") ~= nil end)
  check("a mend is applied", line_of("^parameter mm$") ~= nil, vim.api.nvim_buf_get_lines(0, 10, 40, false))
  wait(function() return finding("undeclared-name") == nil end)
  check("the finding is gone", finding("undeclared-name") == nil, vim.diagnostic.get(0))

  -- A hover.
  local r, c = line_of("φ: angle")
  vim.api.nvim_win_set_cursor(0, { r, c })
  vim.lsp.buf.hover()
  local text
  wait(function()
    for _, w in ipairs(vim.api.nvim_list_wins()) do
      if vim.api.nvim_win_get_config(w).relative ~= "" then
        text = table.concat(vim.api.nvim_buf_get_lines(vim.api.nvim_win_get_buf(w), 0, -1, false), "\n")
        return true
      end
    end
  end)
  check("a hover shows the momentum", text ~= nil and text:find("m r² sin² θ φ̇", 1, true) ~= nil, text or "none")
  vim.cmd("fclose!")

  -- Tokens.
  local tokens
  wait(function()
    tokens = vim.lsp.semantic_tokens.get_at_pos(0, r - 1, c)
    return tokens ~= nil and #tokens > 0
  end)
  check("a coordinate has its token", tokens and tokens[1] and tokens[1].type == "variable", tokens)

  -- Completion, through the omni function.
  local last = vim.api.nvim_buf_line_count(0)
  vim.api.nvim_buf_set_lines(0, last, last, false, { "potential spring = 1/2 J the" })
  vim.api.nvim_win_set_cursor(0, { last + 1, 28 })
  local items = client():request_sync("textDocument/completion", vim.tbl_extend("force", vim.lsp.util.make_position_params(0, client().offset_encoding), { position = { line = last, character = 28 } }), 5000)
  local labels = {}
  for _, i in ipairs(items and items.result and (items.result.items or items.result) or {}) do labels[i.label] = i end
  check("names are completed", labels["θ"] ~= nil and labels["r"] ~= nil and labels["cos"] ~= nil, vim.tbl_keys(labels))
  vim.api.nvim_buf_set_lines(0, last, last + 1, false, {})

  -- Rename.
  vim.api.nvim_win_set_cursor(0, { (line_of("^coordinate r")), 11 })
  vim.lsp.buf.rename("ρ")
  wait(function() return line_of("^coordinate ρ: length") ~= nil end)
  check("a coordinate is renamed", line_of("^coordinate ρ: length") ~= nil and line_of("%(ρ sin θ cos φ") ~= nil and line_of("1/2 J %(ρ'/a%)") ~= nil, vim.api.nvim_buf_get_lines(0, 10, 40, false))

  -- Outline and layout.
  local outline = client():request_sync("textDocument/documentSymbol", { textDocument = vim.lsp.util.make_text_document_params(0) }, 5000)
  check("the outline lists the items", outline and outline.result and #outline.result > 10, outline)
  vim.api.nvim_buf_set_lines(0, -1, -1, false, { "potential   spring=  1/2 k_1   ρ^2" })
  vim.lsp.buf.format({ async = false })
  check("the model is laid out", line_of("= 1/2 k_1 ρ^2$") ~= nil, vim.api.nvim_buf_get_lines(0, -4, -1, false))

  -- The sheet.
  vim.cmd("LeastwiseSheet")
  local function sheet()
    for _, b in ipairs(vim.api.nvim_list_bufs()) do
      if vim.api.nvim_buf_get_name(b):find("leastwise%-sheet") then
        return table.concat(vim.api.nvim_buf_get_lines(b, 0, -1, false), "\n")
      end
    end
  end
  wait(function() return (sheet() or ""):find("Equations of motion", 1, true) ~= nil end)
  check("the sheet is shown", (sheet() or ""):find("Equations of motion", 1, true) ~= nil, sheet() or "none")

  -- Settings, which the server pulls anew.
  vim.api.nvim_buf_set_lines(0, -2, -1, false, {})
  local function summed()
    return vim.iter(vim.lsp.inlay_hint.get({ bufnr = 0 })):any(function(h) return h.inlay_hint.label:find("degrees of freedom", 1, true) ~= nil end)
  end
  wait(summed)
  local shown = summed()
  client().settings = { leastwise = { hints = { summary = false } } }
  client():notify("workspace/didChangeConfiguration", { settings = client().settings })
  wait(function() return not summed() end)
  check("settings are pulled", shown and not summed(), vim.lsp.inlay_hint.get({ bufnr = 0 }))

  -- Crashes. The server is a child of this Neovim.
  local function kill()
    for _, pid in ipairs(vim.api.nvim_get_proc_children(vim.fn.getpid())) do
      local child = vim.api.nvim_get_proc(pid)
      if child and child.name:find("leastwise", 1, true) then vim.uv.kill(pid, "sigkill") end
    end
  end
  local function crash()
    local before = client().id
    kill()
    return wait(function() local now = client() return now ~= nil and now.id ~= before and now.initialized end)
  end
  check("the server is started anew after a crash", crash(), vim.lsp.get_clients())
  check("and again", crash() and crash())
  local said = {}
  vim.notify = function(text) table.insert(said, text) end
  kill()
  wait(function() return table.concat(said):find("LeastwiseRestart", 1, true) ~= nil end)
  check("not without end, and it is said", #said > 0 and client() == nil, said)
  vim.cmd("LeastwiseRestart")
  check("a restart can be asked for", wait(function() return client() ~= nil and client().initialized end))
end

-- As a user: after the start.
vim.api.nvim_create_autocmd("VimEnter", {
  callback = vim.schedule_wrap(function()
    local ok, failure = xpcall(drive, debug.traceback)
    if not ok then
      out("FAIL the test itself: " .. tostring(failure))
    end
    vim.cmd("qa!")
  end),
})
