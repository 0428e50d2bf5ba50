// The kernels with what several threads need besides.

export * from './front';
export { help, setSharing, stopHelp } from './share';
export { setTile } from './tile';
