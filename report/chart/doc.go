// Package chart draws the survey's charts as vector graphics on any gonum canvas.
//
// It uses gonum's drawing, text and font packages, but not the plot package itself: that one links five output formats
// and their libraries into the program, and lays its panels out one by one, where phases must share one scale and
// stand exactly above each other.
//
// Phases are told apart by colour and dash, from the 2002 Color Universal Design set; fields of values use a scale
// whose lightness falls all the way, so that a grey copy reads the same.
package chart
