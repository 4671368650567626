# At installation: pages for man and shell completion, written by the program from its own options.
# Needs PROGRAM, and MAN and SHARE below the prefix.
set(root "$ENV{DESTDIR}${CMAKE_INSTALL_PREFIX}")

function(describe what file)
  get_filename_component(folder "${file}" DIRECTORY)
  file(MAKE_DIRECTORY "${folder}")
  execute_process(COMMAND "${PROGRAM}" describe ${what} OUTPUT_FILE "${file}" RESULT_VARIABLE code)
  if(NOT code EQUAL 0)
    message(FATAL_ERROR "stanchion describe ${what} failed")
  endif()
  message(STATUS "Installing: ${file}")
endfunction()

execute_process(COMMAND "${PROGRAM}" describe commands OUTPUT_VARIABLE commands OUTPUT_STRIP_TRAILING_WHITESPACE)
string(REPLACE "\n" ";" commands "${commands}")
describe(man "${root}/${MAN}/man1/stanchion.1")
foreach(command IN LISTS commands)
  describe(man-${command} "${root}/${MAN}/man1/stanchion-${command}.1")
endforeach()
describe(bash "${root}/${SHARE}/bash-completion/completions/stanchion")
describe(zsh "${root}/${SHARE}/zsh/site-functions/_stanchion")
describe(fish "${root}/${SHARE}/fish/vendor_completions.d/stanchion.fish")
