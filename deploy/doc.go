// Package deploy holds what puts Heatreeve on a machine and no code of its own: the scripts that build and check the
// project, the service unit, the container recipe, and settings for the broker and for Prometheus. Its tests read
// every one of these files and, under the build tag services, run them with Debian's own programs.
package deploy
