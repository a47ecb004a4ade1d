install(TARGETS sward RUNTIME DESTINATION ${CMAKE_INSTALL_BINDIR})
install(DIRECTORY pipeline/optics/materials DESTINATION ${CMAKE_INSTALL_DATADIR}/sward)

# Manual page and completion are written by the program itself from its command and option tables.
add_custom_command(TARGET sward POST_BUILD
  COMMAND $<TARGET_FILE:sward> --man > sward.1
  COMMAND $<TARGET_FILE:sward> --completion > sward.bash
  WORKING_DIRECTORY ${CMAKE_BINARY_DIR} VERBATIM)
install(FILES ${CMAKE_BINARY_DIR}/sward.1 DESTINATION ${CMAKE_INSTALL_MANDIR}/man1)
install(FILES ${CMAKE_BINARY_DIR}/sward.bash DESTINATION ${CMAKE_INSTALL_DATADIR}/bash-completion/completions RENAME sward)
