# Installation, and the Debian package: cmake --build build --target package, or cpack in the build folder.
include(GNUInstallDirs)

install(TARGETS agreed RUNTIME)
install(FILES deploy/systemd/agreed.service DESTINATION /lib/systemd/system)
install(FILES deploy/debian/agreed.yaml DESTINATION /etc/agreed)
# The documents lie beside each other as in the source, so that what they link and name is where they say.
install(FILES README.md DESTINATION ${CMAKE_INSTALL_DOCDIR})
install(FILES deploy/alerts.md deploy/choosing-limits.md deploy/first-day.md deploy/installation.md deploy/moving.md
        deploy/reading-the-page.md deploy/windows-share.md DESTINATION ${CMAKE_INSTALL_DOCDIR}/deploy)
install(FILES deploy/nginx/agreed.conf DESTINATION ${CMAKE_INSTALL_DOCDIR}/deploy/nginx)
install(FILES config/reference.yaml DESTINATION ${CMAKE_INSTALL_DOCDIR}/config)
install(FILES examples/first.yaml DESTINATION ${CMAKE_INSTALL_DOCDIR}/examples)
install(DIRECTORY examples/formats DESTINATION ${CMAKE_INSTALL_DOCDIR}/examples)
install(FILES deploy/debian/copyright DESTINATION ${CMAKE_INSTALL_DOCDIR})
# -n: no time in it, so that two packages of one source are the same.
set_property(DIRECTORY APPEND PROPERTY CMAKE_CONFIGURE_DEPENDS ${PROJECT_SOURCE_DIR}/deploy/debian/changelog)
file(MAKE_DIRECTORY ${CMAKE_BINARY_DIR}/package)
execute_process(COMMAND gzip -9nc ${PROJECT_SOURCE_DIR}/deploy/debian/changelog
                OUTPUT_FILE ${CMAKE_BINARY_DIR}/package/changelog.gz COMMAND_ERROR_IS_FATAL ANY)
install(FILES ${CMAKE_BINARY_DIR}/package/changelog.gz DESTINATION ${CMAKE_INSTALL_DOCDIR})

set(CPACK_GENERATOR DEB)
set(CPACK_SET_DESTDIR ON)  # some files go outside the prefix
set(CPACK_INSTALL_PREFIX /usr)
set(CPACK_STRIP_FILES ON)
set(CPACK_INSTALL_DEFAULT_DIRECTORY_PERMISSIONS
    OWNER_READ OWNER_WRITE OWNER_EXECUTE GROUP_READ GROUP_EXECUTE WORLD_READ WORLD_EXECUTE)
set(CPACK_PACKAGE_NAME agreed)
set(CPACK_PACKAGE_CONTACT "agreed <agreed@harrow.example>")
set(CPACK_PACKAGE_DESCRIPTION_SUMMARY "says whether two analyzers still agree")
set(CPACK_PACKAGE_DESCRIPTION
  "A service that watches the results of analyzers which are used as if they were
one instrument: control charts of their check standards, a rolling Deming fit
of their split samples, and signed webhooks when one has moved or the two no
longer agree to within what the product can bear.")
set(CPACK_DEBIAN_FILE_NAME DEB-DEFAULT)
set(CPACK_DEBIAN_PACKAGE_SECTION science)
set(CPACK_DEBIAN_PACKAGE_PRIORITY optional)
set(CPACK_DEBIAN_PACKAGE_SHLIBDEPS ON)
set(CPACK_DEBIAN_PACKAGE_DEPENDS "adduser, init-system-helpers (>= 1.54), tzdata")
set(CPACK_DEBIAN_PACKAGE_RECOMMENDS "ca-certificates")
set(CPACK_DEBIAN_PACKAGE_CONTROL_STRICT_PERMISSION ON)
set(CPACK_DEBIAN_PACKAGE_CONTROL_EXTRA
    "${PROJECT_SOURCE_DIR}/deploy/debian/conffiles;${PROJECT_SOURCE_DIR}/deploy/debian/postinst;${PROJECT_SOURCE_DIR}/deploy/debian/prerm;${PROJECT_SOURCE_DIR}/deploy/debian/postrm")
include(CPack)
