-- Drives the language server from Neovim without a screen, in the copy of `shell.tex` that is open.
--
--   nvim --headless --clean -u neovim.lua shell.tex
--
-- The environment says what to start (INDEXWISE_SERVER, words with tabs between them), how many seconds to wait for
-- anything (INDEXWISE_WAIT), what hovering has to tell (INDEXWISE_HOVER) and which fix to take (INDEXWISE_FIX). The
-- texts that have to come out stand in `renamed.tex` and `mended.tex` beside the document. The last line is "all as it
-- should be", or "wrong: " with what; then the status is 1.
--
-- Tried with Neovim 0.7.2 and 0.11.4. The first knows neither `vim.lsp.start` nor inlay hints, and counts columns in
-- UTF-16. The other offers UTF-8, asks for findings instead of being sent them, and shows inlay hints.

local server = vim.split(vim.env.INDEXWISE_SERVER, '\t')
local patience = tonumber(vim.env.INDEXWISE_WAIT) * 1000
local rich = vim.fn.has('nvim-0.11') == 1
local buffer

local function lines()
  return vim.api.nvim_buf_get_lines(buffer, 0, -1, false)
end

local function text()
  return table.concat(lines(), '\n')
end

-- Line and byte column, both from zero, where `piece` begins.
local function place(piece)
  for number, line in ipairs(lines()) do
    local start = line:find(piece, 1, true)
    if start then
      return number - 1, start - 1
    end
  end
  error('the document has no ' .. piece, 0)
end

local function put_cursor(piece, beyond)
  local line, column = place(piece)
  vim.api.nvim_win_set_cursor(0, { line + 1, column + beyond })
end

local function await(what, holds)
  if not vim.wait(patience, holds, 20) then
    error(what .. ' within ' .. patience / 1000 .. ' seconds', 0)
  end
end

local function must(holds, what)
  if not holds then
    error(what, 0)
  end
end

local function rule(diagnostic)
  return diagnostic.code or (diagnostic.user_data and diagnostic.user_data.lsp.code)
end

local function start()
  local configuration = {
    name = 'indexwise',
    cmd = server,
    root_dir = vim.fn.getcwd(),
    settings = { indexwise = { inlayHints = true } },
  }
  vim.bo.filetype = 'tex'
  if vim.lsp.start then
    return vim.lsp.start(configuration)
  end
  local client = vim.lsp.start_client(configuration)
  vim.lsp.buf_attach_client(buffer, client)
  return client
end

local function agrees_on_columns(client)
  await('no server has started', function()
    local one = vim.lsp.get_client_by_id(client)
    return one and one.initialized
  end)
  local one = vim.lsp.get_client_by_id(client)
  local wanted = rich and 'utf-8' or 'utf-16'
  must(one.offset_encoding == wanted, 'columns are counted in ' .. tostring(one.offset_encoding) .. ' here')
  local said = one.server_capabilities.positionEncoding
  must(said == wanted, 'columns are counted in ' .. tostring(said) .. ' by the server')
  must(not rich or one.server_capabilities.diagnosticProvider, 'findings cannot be asked for')
end

local function is_told_of_the_slip()
  await('there is no finding', function()
    return #vim.diagnostic.get(buffer) > 0
  end)
  local found = vim.diagnostic.get(buffer)
  must(#found == 1, #found .. ' findings')
  local line, column = place('k $, which')
  local one = found[1]
  must(rule(one) == 'free-index-mismatch', 'the finding is of ' .. tostring(rule(one)))
  must(one.source == 'indexwise', 'the finding is from ' .. tostring(one.source))
  must(one.severity == vim.diagnostic.severity.ERROR, 'the finding is no error')
  -- Characters of two, three and four bytes stand before it.
  must(
    one.lnum == line and one.col == column and one.end_lnum == line and one.end_col == column + 1,
    ('the finding is at %d:%d to %d:%d'):format(one.lnum, one.col, one.end_lnum, one.end_col)
  )
end

local function hovers(client)
  put_cursor('S_{ij}', 4)
  local encoding = vim.lsp.get_client_by_id(client).offset_encoding
  local params = vim.lsp.util.make_position_params(0, encoding)
  local answers = vim.lsp.buf_request_sync(buffer, 'textDocument/hover', params, patience) or {}
  local hover = answers[client] and answers[client].result
  must(type(hover) == 'table' and hover.contents, 'nothing is told when hovering')
  local told = hover.contents.value
  must(told:find(vim.env.INDEXWISE_HOVER, 1, true), 'hovering tells of no sum written out: ' .. told)
end

local function renames()
  put_cursor('v_j', 2)
  local before = text()
  vim.lsp.buf.rename('m')
  await('nothing is renamed', function()
    return text() ~= before
  end)
end

-- Takes the offer that puts the letter right, from what the editor would show to choose from.
local function fixes()
  vim.ui.select = function(items, options, choose)
    for _, item in ipairs(items) do
      local title = options.format_item(item)
      if title:find(vim.env.INDEXWISE_FIX, 1, true) then
        return choose(item)
      end
    end
    choose(nil)
  end
  local before = text()
  put_cursor('k $, which', 0)
  vim.lsp.buf.code_action()
  await('nothing is mended', function()
    return text() ~= before
  end)
end

local function text_is(name, what)
  local wanted = vim.fn.readfile(name)
  for number, line in ipairs(lines()) do
    must(line == wanted[number], what .. ' line ' .. number .. ' into: ' .. line)
  end
  must(#wanted == #lines(), what .. ' the number of lines')
end

local function shows_hints()
  vim.lsp.inlay_hint.enable(true, { bufnr = buffer })
  await('there is no inlay hint', function()
    return #vim.lsp.inlay_hint.get({ bufnr = buffer }) > 0
  end)
end

local function test()
  buffer = vim.api.nvim_get_current_buf()
  local client = start()
  agrees_on_columns(client)
  is_told_of_the_slip()
  hovers(client)
  if rich then
    shows_hints()
  end
  renames()
  text_is('renamed.tex', 'the rename makes')
  fixes()
  text_is('mended.tex', 'the fix makes')
  await('the finding is still there', function()
    return #vim.diagnostic.get(buffer) == 0
  end)
end

vim.api.nvim_create_autocmd('VimEnter', {
  callback = function()
    local good, problem = pcall(test)
    io.stdout:write(good and 'all as it should be' or 'wrong: ' .. tostring(problem), '\n')
    vim.cmd(good and 'qall!' or 'cquit 1')
  end,
})
