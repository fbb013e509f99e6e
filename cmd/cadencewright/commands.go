package main

// commands are all verbs of the program, in the order in which help lists
// them. A new one is a file of its own and a line here.
var commands = []command{
	demoCommand,
	serveCommand,
	planCommand,
	checkCommand,
	skyCommand,
	orbitCommand,
	schemaCommand,
	importCommand,
	exportCommand,
	userCommand,
	keyCommand,
	migrateCommand,
	healthCommand,
	versionCommand,
}
