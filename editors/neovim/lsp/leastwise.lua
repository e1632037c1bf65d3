-- The language server. `vim.lsp.config("leastwise", { … })` in your own files changes what is set here:
-- `settings = { leastwise = { hints = { claims = false } } }`, for one.

-- The server's program: `vim.g.leastwise_server`, else the one on the PATH.
local function program()
  local set = vim.g.leastwise_server
  return set ~= nil and set ~= "" and vim.fn.expand(set) or "leastwise"
end

return {
  cmd = function(dispatchers)
    return vim.lsp.rpc.start({ program(), "lsp" }, dispatchers)
  end,
  filetypes = { "leastwise" },
  root_markers = { ".git" },
  settings = { leastwise = {} },
  -- The same keys by both ways: what the server is told at the start is what it can ask for later.
  before_init = function(params, config)
    params.initializationOptions = vim.tbl_get(config, "settings", "leastwise") or {}
    if vim.tbl_isempty(params.initializationOptions) then
      params.initializationOptions = vim.empty_dict()
    end
  end,
}
