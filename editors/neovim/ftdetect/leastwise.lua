vim.filetype.add({ extension = { least = "leastwise" } })
