# Installs the build in BUILD into a fresh folder, builds the consumers in SOURCE against it, runs them on MODEL.
set(work ${BUILD}/install_test)
set(prefix ${work}/prefix)
file(REMOVE_RECURSE ${work})
file(MAKE_DIRECTORY ${work})

function(run)
  execute_process(COMMAND ${ARGN} RESULT_VARIABLE code OUTPUT_VARIABLE output ERROR_VARIABLE output)
  if(NOT code EQUAL 0)
    message(FATAL_ERROR "${ARGN}\nended with ${code}:\n${output}")
  endif()
  set(output "${output}" PARENT_SCOPE)
endfunction()

function(expect words)
  string(FIND "${output}" "${words}" at)
  if(at LESS 0)
    message(FATAL_ERROR "expected \"${words}\" in:\n${output}")
  endif()
endfunction()

run(${CMAKE_COMMAND} --install ${BUILD} --prefix ${prefix})

# C++, through the CMake package.
run(${CMAKE_COMMAND} -S ${SOURCE} -B ${work}/consumer -DCMAKE_PREFIX_PATH=${prefix} -DCMAKE_CXX_COMPILER=${CXX})
run(${CMAKE_COMMAND} --build ${work}/consumer)
run(${work}/consumer/consumer ${MODEL}/K.mtx ${MODEL}/G.mtx)
expect("positive definite")
expect("4 below 2")

# C, through pkg-config with the prefix it was moved to.
file(GLOB_RECURSE descriptions ${prefix}/*/stanchion.pc)
list(GET descriptions 0 description)
get_filename_component(folder ${description} DIRECTORY)
set(ENV{PKG_CONFIG_PATH} ${folder})
run(pkg-config --define-variable=prefix=${prefix} --cflags --libs stanchion)
separate_arguments(flags UNIX_COMMAND "${output}")
run(${CC} -std=c11 -Wall -Wextra -Werror -pedantic ${SOURCE}/consumer.c -o ${work}/consumer_c ${flags})
run(${work}/consumer_c ${MODEL}/K.mtx ${MODEL}/G.mtx)
expect("0 negative, proved")
expect("4 to 4 below 2")
expect("no-such-file.mtx")

# The program itself.
file(GLOB_RECURSE programs ${prefix}/bin/stanchion)
run(${programs} check ${MODEL}/K.mtx)
expect("K is positive definite")
run(${programs} check ${MODEL}/K.mtx --certificate ${work}/claim.json)
run(${programs} recheck ${work}/claim.json)
expect("Agreed")
file(GLOB_RECURSE module ${prefix}/*/stanchion/recheck_mumps.so)
if(module)
  expect("other library")
endif()
