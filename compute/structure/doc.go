// Package structure gives the depth-discharge relations of weirs at the end of a channel.
package structure
