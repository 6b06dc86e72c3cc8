---@meta
-- The part of the module that reads boards: what libstub_ipc2581.h declares. What is said at the top of libstub.d.lua
-- holds here too.

---@class libstub
local libstub = {}

---Which net carries what, and what the fabricator can do; the guide describes the file.
---@class libstub.rules
local rules = {}

---Reads a rules file.
---@param path string
---@return libstub.rules?, string? message, integer? code E_READ, E_FORMAT
function libstub.rules_load(path) end

---Reads rules from a string.
---@param text string
---@return libstub.rules?, string? message, integer? code E_FORMAT
function libstub.rules_parse(text) end

---@return integer
function rules:signal_count() end

---Signal number i.
---@param i integer from 1
---@return string? name, libstub.signal|string signal or the message
---@return libstub.criteria|integer criteria or the code
function rules:signal(i) end

---Number of the signal that a net carries, nil for none.
---@param net string
---@return integer? number from 1
function rules:match(net) end

---What the `fab` rules say; members without a rule are 0, sides without a rule both.
---@return libstub.capability
function rules:capability() end

---Releases it. Closing twice is fine; closing while a board is loaded with it is an error.
function rules:close() end

---@class libstub.load_options
---@field rules? libstub.rules default none: no signals, no returns, no defaults
---@field stackup? string name of the stackup to use where a file has several; default the first
---@field progress? fun(fraction: number): boolean? called now and then, 0 to 1; false (not nil): give up. An error in it stops the loading and is raised by board_load

---@class libstub.board
local board = {}

---Reads a board, plain or gzip, streaming.
---@param path string
---@param options? libstub.load_options
---@return libstub.board?, string? message, integer? code E_READ, E_FORMAT, E_ARGUMENT, E_NONE
function libstub.board_load(path, options) end

---Name of the step read.
---@return string
function board:name() end

---Its stackup; it lives with the board.
---@return libstub.stackup
function board:stackup() end

---@class libstub.hole
---@field name string "" where the file has none
---@field net string
---@field padstack string
---@field kind "via"|"pin"
---@field signal? integer number of the rules' signal, from 1
---@field partner? integer hole of the other net of the pair, from 1
---@field status integer OK, or why it is no via
---@field x number m
---@field y number m
---@field line integer of the file

---Number of plated holes.
---@return integer
function board:hole_count() end

---Plated hole i, in the order of the file.
---@param i integer from 1
---@return libstub.hole?, string? message, integer? code E_NONE
function board:hole(i) end

---All of them. For a large board ask one at a time.
---@return libstub.hole[]
function board:holes() end

---Hole i as a via on the board's stackup. Where the hole's status is not OK, via:check says why.
---@param i integer from 1
---@return libstub.via?, string? message, integer? code E_NONE
function board:via(i) end

---@class libstub.notice
---@field severity "note"|"warning"|"refused"
---@field message string what, where, and the rule it was settled by
---@field line integer of the file, of the first one
---@field count integer how many like it

---Number of notices.
---@return integer
function board:notice_count() end

---Notice i.
---@param i integer from 1
---@return libstub.notice?, string? message, integer? code E_NONE
function board:notice(i) end

---Whatever was missing, contradictory or refused: all notices.
---@return libstub.notice[]
function board:notices() end

---Plans the board: job i is hole i, with the signal and criteria that the rules give its net.
---@param rules? libstub.rules
---@param capability? libstub.capability default what the rules say; needed without rules
---@param options? libstub.model_options
---@return libstub.plan?, string? message, integer? code
function board:plan(rules, capability, options) end

---A row per plated hole. Each file is written beside its place and moved there when it is whole.
---@param plan libstub.plan
---@param path string
---@return true?, string? message, integer? code E_WRITE
function board:write_plan_csv(plan, path) end

---A row per drill group.
---@param plan libstub.plan
---@param path string
---@return true?, string? message, integer? code E_WRITE
function board:write_drill_csv(plan, path) end

---The board file that was read, with a Backdrill specification per drill group; .gz is compressed.
---@param plan libstub.plan
---@param path string
---@return true?, string? message, integer? code E_READ, E_WRITE, E_FORMAT
function board:write(plan, path) end

---The summary a person reads, plain text.
---@param plan libstub.plan
---@return string? text, string? message, integer? code
function board:summary(plan) end

---Releases it. Closing twice is fine.
function board:close() end
