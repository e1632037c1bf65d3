vim.bo.commentstring = "# %s"
vim.bo.comments = ":#"
-- Names have letters of all alphabets, digits, `_` and subscripts.
vim.opt_local.iskeyword = "@,48-57,_,192-255"
-- An item is a fold: it begins in the first column, and indented lines go on with it.
vim.opt_local.foldmethod = "indent"
vim.opt_local.foldlevel = 99
vim.opt_local.expandtab = true
vim.opt_local.shiftwidth = 4
vim.b.undo_ftplugin = "setlocal commentstring< comments< iskeyword< foldmethod< foldlevel< expandtab< shiftwidth<"
