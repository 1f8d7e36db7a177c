package main

// calibrateCmd is the group of calibrations, each of which prints settings to paste.
type calibrateCmd struct {
	Camera calibrateCameraCmd `cmd:"" help:"Measure gain and read noise of the camera from the light and dark frames of a night."`
	Number calibrateNumberCmd `cmd:"" help:"Find one common factor of alpha, of the magnification, of the scattering length or of sight_hz that makes chemical potentials and thermal numbers of a fitted night agree."`
}
