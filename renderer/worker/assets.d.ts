/** The address at which the built page finds a file. */
declare module "*?url" {
  const address: string;
  export default address;
}
