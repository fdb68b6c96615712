declare module '*?node-worker' {
  const url: () => URL
  export default url
}
