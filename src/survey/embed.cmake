# SPDX-License-Identifier: GPL-3.0-or-later
# cmake -DSQL_DIR=... -DOUTPUT=... -P embed.cmake
# Writes the .sql files as byte arrays: the program needs no file beside it, and no text of
# theirs has to be escaped. Each array ends with a NUL that its size doesn't count.
set(text "/* Made from sql/ by embed.cmake. */\n#include \"survey/embedded.h\"\n")

function(embed file symbol)
  file(READ ${file} hex HEX)
  string(LENGTH "${hex}" digits)
  math(EXPR size "${digits} / 2")
  string(REGEX REPLACE "([0-9a-f][0-9a-f])" "0x\\1," bytes "${hex}")
  string(REGEX REPLACE "((0x..,)(0x..,)(0x..,)(0x..,)(0x..,)(0x..,)(0x..,)(0x..,))" "\\1\n" bytes "${bytes}")
  set(text "${text}static const unsigned char ${symbol}[] = {\n${bytes}0x00};\n" PARENT_SCOPE)
  set(size ${size} PARENT_SCOPE)
endfunction()

foreach(name schema derived views)
  embed(${SQL_DIR}/${name}.sql ${name}_bytes)
  string(APPEND text "const struct rfade_sql rfade_sql_${name} = {0, (const char *)${name}_bytes, ${size}};\n")
endforeach()

# migrations/NNNN_what.sql brings a survey to user_version NNNN; CMake sorts the names.
file(GLOB migrations ${SQL_DIR}/migrations/[0-9][0-9][0-9][0-9]_*.sql)
list(SORT migrations)
set(rows "")
foreach(migration ${migrations})
  get_filename_component(name ${migration} NAME)
  string(REGEX MATCH "^0*([1-9][0-9]*)_" ignored ${name})
  set(version ${CMAKE_MATCH_1})
  embed(${migration} migration_${version}_bytes)
  string(APPEND rows "    {${version}, (const char *)migration_${version}_bytes, ${size}},\n")
endforeach()
string(APPEND text "const struct rfade_sql rfade_sql_migrations[] = {\n${rows}    {0, 0, 0}};\n")
file(WRITE ${OUTPUT} "${text}")
