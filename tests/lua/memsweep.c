/*
** Runs Lua scripts under an allocator that counts, and that fails when told to.
**
**     memsweep SCRIPT [ARGUMENTS]           as lua does; memory left when the state closes is a failure
**     memsweep --sweep SCRIPT [ARGUMENTS]   SCRIPT returns a list of { name = , setup = , run = }; run(setup()) is done
**                                           again and again, its allocation number 1, 2, 3 ... failing, until none fails
**
** A run whose memory fails must end in "not enough memory", or in a true result where the collector found some; nothing
** may leak, and the next run in a fresh state must not be affected.
*/
#include <lauxlib.h>
#include <lua.h>
#include <lualib.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define RUNS_MAX 20000
#define BYTES_MAX ((size_t)1 << 30)     /* more than a test needs; sanitizers stop at sizes beyond belief */

typedef struct memory {
    size_t live;                /* bytes */
    long   count;               /* allocations since armed */
    long   fail_at;             /* number of the first one to fail; 0: none */
    int    once;                /* only that one fails, not those after it */
    int    failed;              /* how many have */
} memory;

static memory main_memory;

static int must_fail(memory *m)
{
    m->count++;
    if (m->fail_at == 0 || (m->once ? m->count != m->fail_at : m->count < m->fail_at))
        return 0;
    m->failed++;
    return 1;
}

static void *allocate(void *user, void *block, size_t old_size, size_t new_size)
{
    memory *m = user;
    void *moved;
    if (block == NULL)
        old_size = 0;           /* then it is a kind of object */
    if (new_size == 0) {
        free(block);
        m->live -= old_size;
        return NULL;
    }
    if (new_size > old_size && (new_size > BYTES_MAX || must_fail(m)))
        return NULL;
    moved = realloc(block, new_size);
    if (moved != NULL)
        m->live += new_size - old_size;
    return moved;
}

static int traceback(lua_State *L)
{
    luaL_traceback(L, L, luaL_tolstring(L, 1, NULL), 1);
    return 1;
}

/* A state with the standard libraries and `arg`; null if there is no memory even for that. */
static lua_State *new_state(memory *m, char **arguments)
{
    lua_State *L = lua_newstate(allocate, m);
    int i;
    if (L == NULL)
        return NULL;
    luaL_openlibs(L);
    lua_newtable(L);
    for (i = 0; arguments[i] != NULL; i++) {
        lua_pushstring(L, arguments[i]);
        lua_rawseti(L, -2, i);
    }
    lua_setglobal(L, "arg");
    return L;
}

/* Leaves the script's results on the stack. */
static int run_script(lua_State *L, const char *path)
{
    lua_settop(L, 0);
    lua_pushcfunction(L, traceback);
    if (luaL_loadfile(L, path) == LUA_OK && lua_pcall(L, 0, 1, 1) == LUA_OK)
        return 1;
    fprintf(stderr, "%s\n", lua_tostring(L, -1));
    return 0;
}

/* ---- sweep ---- */

/* Pushes member `key` of operation `number` of the list at stack index 2. */
static int operation(lua_State *L, int number, const char *key)
{
    int type = LUA_TNIL;
    if (lua_rawgeti(L, 2, number) == LUA_TTABLE)
        type = lua_getfield(L, -1, key);
    else
        lua_pushnil(L);
    lua_remove(L, -2);
    return type;
}

/* One run with failing memory. 1: nothing failed, the sweep is over; 0: go on; -1: wrong. */
static int run_once(char **arguments, int number, const char *name, long fail_at, int once)
{
    memory m = {0, 0, 0, 0, 0};
    lua_State *L = new_state(&m, arguments);
    int results, status, verdict = -1;
    if (L == NULL || !run_script(L, arguments[0]))
        return -1;
    operation(L, number, "run");
    results = lua_gettop(L);
    if (operation(L, number, "setup") != LUA_TFUNCTION)
        lua_pop(L, 1);
    else if (lua_pcall(L, 0, LUA_MULTRET, 1) != LUA_OK) {
        fprintf(stderr, "%s: setup: %s\n", name, lua_tostring(L, -1));
        return -1;
    }
    lua_gc(L, LUA_GCCOLLECT);
    m.count = 0;
    m.failed = 0;
    m.once = once;
    m.fail_at = fail_at;
    status = lua_pcall(L, lua_gettop(L) - results, 1, 0);
    m.fail_at = 0;
    if (status == LUA_OK && lua_toboolean(L, -1))
        verdict = m.failed == 0;
    else if (status != LUA_OK && m.failed > 0 && lua_isstring(L, -1)
             && strstr(lua_tostring(L, -1), "not enough memory") != NULL)
        verdict = 0;
    else
        fprintf(stderr, "%s: allocation %ld%s failing: %s\n", name, fail_at, once ? " alone" : "",
                status == LUA_OK ? "no true result" : luaL_tolstring(L, -1, NULL));
    lua_close(L);
    if (m.live != 0) {
        fprintf(stderr, "%s: allocation %ld%s failing: %lu bytes left\n", name, fail_at, once ? " alone" : "",
                (unsigned long)m.live);
        verdict = -1;
    }
    return verdict;
}

static int sweep_operation(char **arguments, int number, const char *name)
{
    int once, bad = 0;
    for (once = 0; once < 2; once++) {
        long fail_at;
        int verdict = 0;
        for (fail_at = 1; verdict == 0 && fail_at <= RUNS_MAX; fail_at++)
            verdict = run_once(arguments, number, name, fail_at, once);
        printf("%-28s %s allocation failing: %ld runs\n", name, once ? "one" : "every later", fail_at - 1);
        if (verdict != 1) {
            fprintf(stderr, "%s: %s\n", name, verdict == 0 ? "no end" : "failed");
            bad = 1;
        }
    }
    return bad;
}

/* The module stays loaded in a state of its own while others come and go. */
static int sweep(char **arguments)
{
    lua_State *L = new_state(&main_memory, arguments);
    int number, bad = 0, count = 0;
    if (L == NULL)
        return EXIT_FAILURE;
    if (run_script(L, arguments[0]) && lua_istable(L, 2))
        count = (int)lua_rawlen(L, 2);
    else
        fprintf(stderr, "%s: must return a list of operations\n", arguments[0]);
    for (number = 1; number <= count; number++) {
        operation(L, number, "name");
        bad |= sweep_operation(arguments, number, lua_tostring(L, -1));
        lua_pop(L, 1);
    }
    lua_close(L);
    return bad || count == 0 ? EXIT_FAILURE : EXIT_SUCCESS;
}

/* ---- plain run ---- */

static void check_leaks(void)
{
    if (main_memory.live != 0) {
        fprintf(stderr, "memsweep: %lu bytes left when the state was closed\n", (unsigned long)main_memory.live);
        fflush(NULL);
        _Exit(EXIT_FAILURE);
    }
}

static int run(char **arguments)
{
    lua_State *L = new_state(&main_memory, arguments);
    int fine = L != NULL && run_script(L, arguments[0]);
    if (L != NULL)
        lua_close(L);
    return fine ? EXIT_SUCCESS : EXIT_FAILURE;
}

int main(int argc, char **argv)
{
    int sweeping = argc > 1 && strcmp(argv[1], "--sweep") == 0;
    if (argc < 2 + sweeping) {
        fprintf(stderr, "usage: memsweep [--sweep] SCRIPT [ARGUMENTS]\n");
        return EXIT_FAILURE;
    }
    if (atexit(check_leaks) != 0)
        return EXIT_FAILURE;
    return sweeping ? sweep(argv + 2) : run(argv + 1);
}
