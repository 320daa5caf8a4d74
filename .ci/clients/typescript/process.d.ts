// The one thing that the call needs of Node, so that its types need not be fetched.
declare const process: { argv: string[] };
