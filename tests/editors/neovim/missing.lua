-- Without a program the client says so, once.
vim.opt.runtimepath:append(vim.env.LEASTWISE_RUNTIME)
vim.g.leastwise_server = vim.env.LEASTWISE_PROGRAM
local said = {}
vim.notify = function(text) table.insert(said, text) end
vim.cmd("filetype plugin on")
vim.cmd("runtime plugin/leastwise.lua")
vim.cmd("edit " .. vim.env.LEASTWISE_FOLDER .. "/winch.least")
vim.cmd("edit " .. vim.env.LEASTWISE_FOLDER .. "/other.least")
vim.wait(3000, function() return #said > 0 end, 20)
local good = #said == 1 and said[1]:find("vim.g.leastwise_server", 1, true) ~= nil
io.stdout:write((good and "PASS " or "FAIL ") .. "a missing program is told once" .. (good and "" or ": " .. vim.inspect(said)) .. "\n")
vim.cmd("qa!")
