/** A module of AssemblyScript, built to WebAssembly (`.ci/assembly.mjs`): its bytes in base64. */
declare module '*?assembly' {
  const base64: string;
  export default base64;
}
